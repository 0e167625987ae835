#pragma once

#include <vector>

#include "wavefount/core/wave.h"
#include "wavefount/waves/arrivals.h"

namespace wavefount {

/// Where a wave starts, in the straightened places of Arrivals.
struct Source {
  Point place_um;
  int origin = 0;  ///< Origin::number, 0 when it comes from outside the view
  int side = 0;    ///< from outside: −1 over the left edge, +1 over the right one, 0 over a wall
};

/// What the fronts of one wave are measured on.
struct FrontView {
  const Arrivals* arrivals = nullptr;
  const std::vector<char>* astray = nullptr;
  std::vector<int> basin;                    ///< by arrival: position of its source
  std::vector<std::vector<int>> neighbours;  ///< by arrival
  double jitter_min = 0;
  double spacing_um = 0;
  bool wide = false;  ///< fronts are curved: distance from the source, not along the tube
};

/// Slowness with its 95 % interval carried over to the speed: the inverse of the interval's ends,
/// without an upper end where the interval holds zero (Fieller 1954).
Slowness slowness_with_speed(double min_per_um, double se_min_per_um);

/// One weighted regression an arm, from the source outwards to both sides; nuclei within one
/// spacing of the source and of the collision with another basin are left out as long as three
/// remain. In wide tubes time is regressed on the distance from an apex that is fitted to the basin
/// (a cone, which far from its apex is a plane).
std::vector<Front> measure_fronts(const std::vector<Source>& sources, const FrontView& view);

/// Mean of the arms in their own directions, weighted by precision; empty without arms.
std::optional<Slowness> mean_slowness(const std::vector<Front>& fronts);

}  // namespace wavefount
