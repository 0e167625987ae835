#pragma once

#include <string>

#include "wavefount/core/observations.h"
#include "wavefount/core/prescan.h"
#include "wavefount/core/tube.h"

namespace wavefount {

/// Decay of the fluorophore under the exciting light.
struct Bleaching {
  double rate_per_min = 0;  ///< 0 where not corrected
  std::string sentence;     ///< what was done and why, for the user

  /// Factor that brings counts at a time back to the start of the film.
  double correction(double time_min) const;
};

/// From the tube's total light above the dark offset. Corrected only where the dark offset is
/// given, both ends and walls are in view (nothing enters or leaves), and the light falls by a
/// steady exponential of at least 2 % over the film.
Bleaching estimate_bleaching(const Observations& observations, const Tube& tube,
                             const CameraModel& camera);

}  // namespace wavefount
