#pragma once

#include <vector>

#include "wavefount/core/wave.h"
#include "wavefount/waves/source_model.h"

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
  const SourceFit* fit = nullptr;
  std::vector<int> basin;                    ///< by arrival: position of its source
  std::vector<std::vector<int>> neighbours;  ///< by arrival
  double spacing_um = 0;
};

/// Slowness with its 95 % interval carried over to the speed: the inverse of the interval's ends,
/// without an upper end where the interval holds zero (Fieller 1954).
Slowness slowness_with_speed(double min_per_um, double se_min_per_um);

/// One arm to each side of every source, from the source outwards along the tube; nuclei within one
/// spacing of the source and of the collision with another basin are left out as long as three
/// remain. Its slowness is the mean and standard deviation over the drawn fields of the time that
/// a front needs from the arm's first nucleus to its last, over the way: measured against simulated
/// tubes, a weighted regression held the truth as often at an even speed, and much too seldom
/// where the speed varies along the tube. Waves without draws get the regression, with the
/// fit's jitter.
std::vector<Front> measure_fronts(const std::vector<Source>& sources, const FrontView& view);

/// Mean of the arms in their own directions, weighted by precision; empty without arms.
std::optional<Slowness> mean_slowness(const std::vector<Front>& fronts);

}  // namespace wavefount
