#pragma once

#include <opencv2/core/mat.hpp>
#include <vector>

#include "still_layers.h"
#include "wavefount/synthetic/blurred_disc.h"
#include "wavefount/synthetic/scene.h"

namespace wavefount {

/// One part of a nucleus' content that came free at one moment: how far it has spread since and how
/// much of it is seen.
struct Portion {
  double sigma_um = 0;
  double light = 0;  ///< as a mean brightness over the nucleus' area, counts
};

/// What of a nucleus' content is free at a time, as portions of equal size. Empty before entry.
std::vector<Portion> released_portions(const SceneLife& life, const SceneOptics& optics,
                                       double time_min);

/// Released light that has spread so far that its original disc no longer shows, gathered on a grid
/// of coarse cells; walls and closed ends throw it back (method of images).
class FarLight {
 public:
  /// Adds the content of one disc, spread as a normal distribution of the given variance.
  void add(const Tube& tube, int tube_index, TubePlace centre, double sigma_um, double total_light);
  /// What was gathered, along a row of the canvas: `count` values from (x, y), a pixel apart. The
  /// place may lie between pixels.
  void row(double x, double y, std::size_t count, std::vector<float>& values) const;
  bool empty() const { return empty_; }

  /// Places of the coarse cells in their tube, shared by all frames of a scene.
  struct Cells {
    Cells(const Scene& scene, const StillLayers& still);
    int columns = 0, rows = 0;
    std::vector<int> tube;
    std::vector<float> along_um, across_um;
  };
  explicit FarLight(const Cells& cells);

 private:
  const Cells* cells_;
  cv::Mat grid_;
  bool empty_ = true;
};

}  // namespace wavefount
