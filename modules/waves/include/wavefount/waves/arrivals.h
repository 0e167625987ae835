#pragma once

#include <vector>

#include "wavefount/core/film.h"

namespace wavefount {

/// The entries of one wave as an arrival field sees them. Places are straightened: x along the
/// tube, y across, µm.
struct Arrivals {
  std::vector<Point> places_um;
  std::vector<double> times_min, se_min;
};

}  // namespace wavefount
