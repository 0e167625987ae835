#pragma once

#include <vector>

#include "wavefount/core/image.h"

namespace wavefount::tube {

/// Reduced images brought into one place.
struct AlignedImages {
  std::vector<double> x, y;          ///< shift of each against the first, reduced pixels
  std::vector<double> agreement;     ///< 0 to 1, against the median image
  std::vector<double> gain, offset;  ///< image = gain · median image + offset
  ImagePointer median;               ///< in the place of the first
  ImagePointer low;                  ///< 20 % quantile
  ImagePointer spread;               ///< standard deviation in time of what is left, counts
};

/// Shifts of all images against the first: each against the one before, checked against the first,
/// both without nuclei (`blob_px`: their largest diameter, reduced pixels); then all against their
/// median image, where only what stands still counts. `images` holds at least one, all of one size,
/// all finite.
AlignedImages align(const std::vector<ImagePointer>& images, double blob_px);

/// Median, quantile and spread for shifts that are known.
AlignedImages combine_at(const std::vector<ImagePointer>& images, std::vector<double> x,
                         std::vector<double> y);

}  // namespace wavefount::tube
