#pragma once

#include <cstdint>
#include <vector>

#include "wavefount/core/wave.h"

namespace wavefount {

/// For every entry of a wave: delay behind the mean of its neighbours (nearer ones weigh more),
/// the probability under the timing errors that it entered before all of them (in waves of fewer
/// than five: before all the others), and its timing:
/// - out-of-step: it does not belong to the field of the others;
/// - leads / lags: before / after all its neighbours with a probability of at least 0.9 (a nucleus
///   at the end of the row lags nobody: the front ends there);
/// - alone: no neighbours; with-front: everything else.
void time_among_neighbours(const Wave& wave, WaveEntries& entries, const std::vector<char>& astray,
                           std::uint64_t seed);

/// Probability of each entry to be the first of its wave under the timing errors.
std::vector<double> first_probabilities(const Wave& wave, const WaveEntries& entries,
                                        std::uint64_t seed);

}  // namespace wavefount
