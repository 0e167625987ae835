#pragma once

#include <vector>

#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"

namespace wavefount {

/// Where in the tube a place lies: `end` within one spacing of a closed end; else `wall` within
/// half a spacing of a closed wall, only where the tube is wider than two spacings; else
/// `interior`.
Site site_of(const TubePlace& place, double spacing_um, bool wide);

/// The place in the tube of an along/across pair; far from any end or wall where no axis is known.
TubePlace straight_place(Point along_across_um, const Tube& tube);

/// The image place of an along/across pair, µm.
Point image_place(Point along_across_um, const Tube& tube);

}  // namespace wavefount
