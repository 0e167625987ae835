#pragma once

#include <vector>

#include "wavefount/waves/chronology.h"

namespace wavefount {

/// Numbers the mitoses of all nuclei so that one number is one mitosis everywhere: phase unwrapping
/// over the neighbour graph. Every pair of successive entries of a station, and every pair of
/// neighbours' entries near in time, votes for a difference of numbers, the more so the nearer the
/// interval lies to a whole number of periods. The start is the spanning tree of the most certain
/// votes; then entries, parts of stations, and sides of the tube are shifted by one as long as that
/// satisfies more votes.
///
/// Returns the number of each entry from 1; 0 for an entry that is one too many at its station.
std::vector<int> cycle_numbers(const std::vector<WaveEntry>& entries, const Chronology& chronology);

}  // namespace wavefount
