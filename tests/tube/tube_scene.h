#pragma once

#include <cstdint>
#include <memory>
#include <vector>

#include "wavefount/core/film.h"

namespace wavefount::testing {

struct Blob {
  double x = 0, y = 0;  ///< full-size pixels in the first frame
  double radius = 8;
  double brightness = 0;          ///< counts
  int first = 0, last = 1 << 20;  ///< frames in which it shows
  double flow_x = 0;              ///< pixels a frame
};

/// One bright tube: an arc (or a straight line) of constant width, in full-size pixels of the first
/// frame. Made apart from the program's own generator, so that neither bends to the other.
struct SceneTube {
  double centre_x = 0, centre_y = 0;  ///< middle of the axis
  double angle = 0;                   ///< of the axis there, radians
  double curvature = 0;               ///< 1 / pixels; positive turns downwards to the right
  double length = 600, width = 120;
  double level = 200;  ///< counts over the outside
  double glow = 0;     ///< counts on the wall
  double glow_sd = 2;  ///< pixels
  bool round_ends = false;
  double roundness = 0;  ///< 1: as thick as a round capillary
};

struct TubeScene {
  int width = 900, height = 400;
  double pixel_um = 1;
  int frames = 40;
  double outside = 30;
  double vignetting = 0;  ///< loss of light at the corners
  double blur = 1.5;      ///< pixels
  double gain = 0.5, read_noise = 2, offset = 100;
  int bit_depth = 16;
  double bleaching = 0;  ///< a frame
  std::vector<SceneTube> tubes;
  std::vector<Blob> blobs;    ///< move with the stage
  std::vector<Blob> bubbles;  ///< dark
  std::vector<Point> drift;   ///< pixels, one a frame, or empty
  std::uint64_t seed = 1;

  Point drift_at(int frame) const;
};

ImagePointer draw_frame(const TubeScene& scene, int frame);

/// The scene as an opened film; `change`, when set, spoils frames after drawing.
class SceneSource : public FrameSource {
 public:
  explicit SceneSource(TubeScene scene);
  const FilmDescription& description() const override { return description_; }
  std::unique_ptr<FrameReader> reader() const override;
  FilmDescription& edit() { return description_; }
  void set_spoiled(std::vector<int> frames, float value) {
    spoiled_ = std::move(frames);
    spoil_value_ = value;
  }

  const TubeScene& scene() const { return scene_; }
  ImagePointer frame(int index) const;

 private:
  TubeScene scene_;
  FilmDescription description_;
  std::vector<int> spoiled_;
  float spoil_value_ = 0;
};

}  // namespace wavefount::testing
