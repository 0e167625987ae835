#pragma once

#include <optional>
#include <vector>

namespace wavefount::tube {

/// Mean brightness from the inside outwards across an edge, outside at 0 and inside near 1.
struct EdgeProfile {
  std::vector<double> values;
  double first = 0;  ///< place of the first value against the half-height position, pixels
  double step = 0.5;
  /// Distance from the half-height position to the tube's axis, pixels: a round tube is thinner
  /// towards its walls. Empty for an end, where thickness does not change along the tube.
  std::optional<double> half_width;
};

/// Where the edge lies against the half-height position, pixels, positive outwards. Half height is
/// pushed out by a wall that glows and pulled in by a round section. The profile is fitted by a
/// blurred step on light that may tilt, the chord of a circle, and a bright line along the edge;
/// the last two stay only where they explain much of what is left without them, so that a plain
/// edge is left where it is.
double edge_offset(const EdgeProfile& profile);

}  // namespace wavefount::tube
