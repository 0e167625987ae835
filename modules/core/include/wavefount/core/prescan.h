#pragma once

#include <string>
#include <vector>

#include "wavefount/core/image.h"

namespace wavefount {

/// The camera's noise: shot noise of the electrons above the dark offset, and read noise.
struct CameraModel {
  static constexpr const char* record_name = "camera";

  double gain_electrons_per_count = 1;
  double read_noise_electrons = 0;
  double dark_offset_counts = 0;
  bool gain_given = false;    ///< from the sidecar; else estimated from the film
  bool offset_given = false;  ///< without it nc_ratio is left empty
  double saturation_counts = 65535;

  /// Variance in counts² of one pixel whose expected value is `counts`.
  double variance(double counts) const;
};

/// A few frames spread over the film, reduced, read before the stream.
struct Prescan {
  static constexpr const char* record_name = "prescan";

  int factor = 1;           ///< side of the square of pixels that became one
  std::vector<int> frames;  ///< which, rising; the first is frame 0 or the first usable one
  std::vector<ImagePointer> images;            ///< reduced means, counts
  std::vector<double> shift_x_px, shift_y_px;  ///< of each against frames[0], full-size pixels
  ImagePointer median;  ///< temporal median after removing the shifts, in the place of frames[0]
  ImagePointer low;     ///< temporal 20 % quantile, likewise: cytoplasm without nuclei
};

}  // namespace wavefount
