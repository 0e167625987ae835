#pragma once

#include "wavefount/core/interphase.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/prescan.h"

namespace wavefount {

/// Fills place, brightness, radius and, where the camera's dark offset is given, nc_ratio_peak from
/// the nucleus' found points of that interphase. `camera` may be null.
void measure_interphase(Interphase& interphase, const Nucleus& nucleus, const CameraModel* camera);

}  // namespace wavefount
