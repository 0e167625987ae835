#pragma once

#include <cstdint>
#include <string>
#include <vector>

namespace wavefount {

/// Pixels x0 <= x < x1 of row y of the full-size frame as recorded.
struct Run {
  std::uint16_t y = 0;
  std::uint16_t x0 = 0;
  std::uint16_t x1 = 0;
};

/// One candidate nucleus in one frame, in full-size pixels of that frame as recorded.
struct Sighting {
  double x_px = 0;  ///< centroid; pixel centres are whole numbers
  double y_px = 0;
  double radius_px = 0;   ///< of the circle of equal area, or of the blob while not outlined
  double area_px = 0;     ///< inside the half-maximum outline
  double brightness = 0;  ///< mean inside the outline above cytoplasm, counts
  double brightness_variance = 0;  ///< of that mean under the camera's noise, counts²
  double cytoplasm = 0;            ///< local, counts, dark offset included
  double integrated = 0;           ///< whole excess light of the nucleus above cytoplasm, counts
  double detection_sigma = 0;      ///< scale-normalised Laplacian response in units of its noise
  int tube = 0;                    ///< index of the tube it lies in
  bool touches_border = false;
  bool saturated = false;
  bool split = false;     ///< cut from a touching neighbour
  std::vector<Run> runs;  ///< the outline's pixels; empty while not outlined
};

/// What was seen in one frame.
struct FrameObservation {
  int frame = 0;
  double time_min = 0;
  bool usable = true;     ///< false: unreadable, excluded, blank, not finite
  std::string problem;    ///< why not usable, a sentence
  double shift_x_px = 0;  ///< of the content against the first frame, full-size pixels
  double shift_y_px = 0;
  double shift_quality = 0;  ///< 0 to 1: height of the correlation peak
  double shift_se_px = 0;    ///< standard error of the better determined direction
  double total_light = 0;    ///< sum of counts over the tubes, dark offset included
  double tube_pixels = 0;    ///< full-size pixels that total_light covers
  double noise = 0;          ///< of one reduced pixel in the cytoplasm, counts
  double sharpness = 0;      ///< robust gradient energy over signal, for focus loss
  double saturated_share = 0;
  std::vector<Sighting> sightings;
};

struct Observations {
  static constexpr const char* record_name = "observations";
  std::vector<FrameObservation> frames;  ///< one a frame, by frame number
};

/// Shift of each frame against the first, smoothed and checked; x_ref = x_px − x_px[frame].
struct Drift {
  static constexpr const char* record_name = "drift";
  std::vector<double> x_px, y_px;
  std::vector<int> jumps;  ///< frames at which the stage jumped
};

}  // namespace wavefount
