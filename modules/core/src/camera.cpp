#include <algorithm>

#include "wavefount/core/prescan.h"

namespace wavefount {

double CameraModel::variance(double counts) const {
  const double electrons = std::max(0.0, counts - dark_offset_counts) * gain_electrons_per_count;
  return (electrons + read_noise_electrons * read_noise_electrons) /
         (gain_electrons_per_count * gain_electrons_per_count);
}

}  // namespace wavefount
