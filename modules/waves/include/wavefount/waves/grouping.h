#pragma once

#include <vector>

#include "wavefount/waves/chronology.h"

namespace wavefount {

/// Neighbours among the chosen entries, by position in `members`; those more than half a period
/// apart in time for each spacing are none.
std::vector<Link> wave_links(const std::vector<int>& members, const WaveEntries& entries,
                             const Tube& tube, const Chronology& chronology,
                             const NeighbourRules& rules);

/// Gathers entries of one cycle number that are connected inside the tube into waves of two
/// or more nuclei, numbered by start; sets `wave` and `neighbours` of the entries.
Waves group_waves(WaveEntries& entries, const Tube& tube, const Chronology& chronology,
                  const NeighbourRules& rules);

/// Median time since the same nuclei entered the mitosis before, for every wave where known.
void measure_periods(Waves& waves, const WaveEntries& entries, const Chronology& chronology);

/// How certain a wave's cycle numbers are.
struct NumberDoubt {
  double steepness = 0;            ///< median |time difference| of neighbours over half a period
  double contradicting_share = 0;  ///< of links that say another difference of numbers
};
NumberDoubt number_doubt(const Wave& wave, const WaveEntries& entries,
                         const Chronology& chronology);

}  // namespace wavefount
