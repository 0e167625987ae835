#pragma once

#include <string>
#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/core/prescan.h"

namespace wavefount::tube {

/// Mean level and noise variance of one square tile, counts and counts².
struct NoisePoint {
  double level = 0;
  double variance = 0;
};

/// Tiles of two frames that follow one another. Only what differs between the frames counts, and of
/// that only the finest diagonal detail (Haar), so that fixed pattern, bleaching, flicker, drift
/// and moving nuclei cancel. Tiles that touch `saturation` or do not vary are left out. Both images
/// have one size; tiles with values that are not finite are left out.
void add_pair(const Image& first, const Image& second, double saturation,
              std::vector<NoisePoint>& points);

/// The same of a single frame, where no second one exists: texture then counts as noise.
void add_single(const Image& image, double saturation, std::vector<NoisePoint>& points);

/// variance = intercept + slope · level.
struct NoiseLine {
  double intercept = 0;
  double slope = 0;     ///< counts: 1 / gain
  double slope_se = 0;  ///< standard error
};

/// Robust line through the tiles: start from medians of level classes (Theil 1950, Sen 1968), then
/// weighted least squares with Tukey's biweight. Photon transfer after Janesick (2007). `points`
/// holds at least two.
NoiseLine fit_noise(const std::vector<NoisePoint>& points, double fixed_slope = 0);

/// Camera model from the tiles; what the sidecar gives wins. `z_planes` summed planes make up a
/// pixel: offset and read noise of the sidecar are a single plane's. Sentences on what was assumed
/// go to `notes`.
CameraModel estimate_camera(const std::vector<NoisePoint>& points, const CameraSettings& given,
                            int z_planes, double darkest_level, double saturation,
                            std::vector<std::string>& notes);

/// Highest count the camera can give: from the bit depth, or from a pile-up of pixels at the very
/// same highest value below it (12 bit in a 16-bit file). For float films without pile-up, the
/// largest float.
class SaturationFinder {
 public:
  explicit SaturationFinder(int bit_depth) : bit_depth_(bit_depth) {}
  void add(const Image& plane);
  double saturation() const;

 private:
  int bit_depth_;
  double highest_ = 0;
  long long at_highest_ = 0;
  long long near_highest_ = 0;
};

}  // namespace wavefount::tube
