#pragma once

#include <cstdint>
#include <vector>

#include "wavefount/waves/arrivals.h"
#include "wavefount/waves/neighbours.h"

namespace wavefount {

/// Permutation test of order in space: how often times dealt out at random among the nuclei differ
/// as little between neighbours as the observed ones do (the numerator of Geary's contiguity ratio,
/// Geary 1954). Those astray take no part.
double order_p_value(const Arrivals& arrivals, const std::vector<char>& astray,
                     const std::vector<Link>& links, int permutations, std::uint64_t seed);

/// Robust spread of the entry times beyond their timing errors, standard deviation.
double spread_min(const Arrivals& arrivals);

/// Slowness along the tube that a wave without visible direction may at most have: the steeper
/// of straight through and outwards from the middle.
struct FlatSlowness {
  double min_per_um = 0, se_min_per_um = 0;
};
FlatSlowness flat_slowness(const Arrivals& arrivals, const std::vector<char>& astray,
                           double jitter_min);

}  // namespace wavefount
