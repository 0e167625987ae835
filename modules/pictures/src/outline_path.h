#pragma once

#include <functional>

#include "wavefount/core/observations.h"
#include "wavefount/pictures/canvas.h"

namespace wavefount {

/// Adds the border of a set of pixels to the canvas' path as closed loops, corners cut half-way
/// along each pixel side so that the steps of pixels do not show. `on_canvas` takes full-size
/// pixels (centres are whole numbers).
void add_outline(Canvas& canvas, const std::vector<Run>& runs,
                 const std::function<Point(Point)>& on_canvas);

}  // namespace wavefount
