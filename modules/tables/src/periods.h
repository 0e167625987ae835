#pragma once

#include <optional>
#include <vector>

#include "wavefount/core/interphase.h"
#include "wavefount/core/wave.h"

namespace wavefount {

/// The entry as the waves use it, by position in Interphases::interphases; nullptr where none.
std::vector<const WaveEntry*> entries_by_interphase(const Interphases& interphases,
                                                    const WaveEntries& entries);

/// Cycle number of every interphase: of its own entry, else counted on from the nearest earlier
/// (or back from the nearest later) numbered interphase of the same nucleus; empty without any.
std::vector<std::optional<int>> cycle_numbers(const Interphases& interphases,
                                              const WaveEntries& entries);

/// A length of time and its standard error, minutes.
struct Duration {
  double min = 0;
  double se_min = 0;
};

/// Period of every interphase: from the nucleus' entry just before to its own. Empty without both:
/// an interphase already present at the start has none.
std::vector<std::optional<Duration>> interphase_periods(const Interphases& interphases,
                                                        const WaveEntries& entries);

/// Mean of periods. The standard error is the larger of the timing errors carried over and, from
/// three periods on, their scatter.
std::optional<Duration> mean_period(const std::vector<Duration>& periods);

}  // namespace wavefount
