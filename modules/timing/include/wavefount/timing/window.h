#pragma once

#include "wavefount/timing/course.h"
#include "wavefount/timing/fall.h"

namespace wavefount {

struct WindowSettings {
  double before_min = 0, after_min = 0;  ///< lengths; at least some frames are taken
  double exposure_min = 0;
  double stamp_shift_min = 0;  ///< from time stamp to start of exposure
};

/// The stretch of a course around one fall, from `start` (where the interphase begins) at most, up
/// to where the signal rises again. Single wild values away from the fall are left out.
FallWindow make_window(const Course& course, const Fall& fall, std::size_t start, double radius_um,
                       const WindowSettings& settings);

}  // namespace wavefount
