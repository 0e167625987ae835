#include "wavefount/core/interphase.h"

#include <cmath>

namespace wavefount {

double ImportFit::brightness_at(double time_min) const {
  if (curved && rate_per_min && plateau && formed_min)
    return *plateau * (1 - std::exp(-*rate_per_min * (time_min - *formed_min)));
  return level_at_start + initial * (time_min - start_min);
}

}  // namespace wavefount
