#include "periods.h"

#include <algorithm>
#include <cmath>
#include <cstdlib>

namespace wavefount {
namespace {

/// Whether two interphases follow each other without a missed one in between.
bool consecutive(const Interphase& earlier, const Interphase& later, std::optional<int> from_cycle,
                 std::optional<int> to_cycle) {
  if (earlier.nucleus != later.nucleus) return false;
  if (from_cycle && to_cycle) return *to_cycle == *from_cycle + 1;
  return later.index == earlier.index + 1;
}

}  // namespace

std::vector<const WaveEntry*> entries_by_interphase(const Interphases& interphases,
                                                    const WaveEntries& entries) {
  std::vector<const WaveEntry*> by_interphase(interphases.interphases.size(), nullptr);
  for (const auto& entry : entries.entries) {
    const auto at = static_cast<std::size_t>(entry.interphase);
    if (entry.interphase >= 0 && at < by_interphase.size()) by_interphase[at] = &entry;
  }
  return by_interphase;
}

std::vector<std::optional<int>> cycle_numbers(const Interphases& interphases,
                                              const WaveEntries& entries) {
  const auto& all = interphases.interphases;
  const auto own = entries_by_interphase(interphases, entries);
  std::vector<std::optional<int>> numbers(all.size());
  for (std::size_t i = 0; i < all.size(); ++i)
    if (own[i] && own[i]->cycle > 0) numbers[i] = own[i]->cycle;
  for (std::size_t i = 1; i < all.size(); ++i)
    if (!numbers[i] && numbers[i - 1] && all[i].nucleus == all[i - 1].nucleus)
      numbers[i] = *numbers[i - 1] + all[i].index - all[i - 1].index;
  for (std::size_t i = all.size(); i-- > 1;) {
    if (numbers[i - 1] || !numbers[i] || all[i].nucleus != all[i - 1].nucleus) continue;
    const int counted = *numbers[i] - (all[i].index - all[i - 1].index);
    if (counted > 0) numbers[i - 1] = counted;
  }
  return numbers;
}

std::vector<std::optional<Duration>> interphase_periods(const Interphases& interphases,
                                                        const WaveEntries& entries) {
  const auto& all = interphases.interphases;
  const auto numbers = cycle_numbers(interphases, entries);
  std::vector<std::optional<Duration>> periods(all.size());
  for (std::size_t i = 1; i < all.size(); ++i) {
    const auto& from = all[i - 1].entry;
    const auto& to = all[i].entry;
    if (!from || !to || !consecutive(all[i - 1], all[i], numbers[i - 1], numbers[i])) continue;
    periods[i] = Duration{to->time_min - from->time_min, std::hypot(from->se_min, to->se_min)};
  }
  return periods;
}

std::optional<Duration> mean_period(const std::vector<Duration>& periods) {
  if (periods.empty()) return std::nullopt;
  const auto count = static_cast<double>(periods.size());
  double sum = 0;
  double timing_variance = 0;
  for (const auto& period : periods) {
    sum += period.min;
    timing_variance += period.se_min * period.se_min;
  }
  const double mean = sum / count;
  double se = std::sqrt(timing_variance) / count;
  if (periods.size() >= 3) {
    double squares = 0;
    for (const auto& period : periods) squares += (period.min - mean) * (period.min - mean);
    se = std::max(se, std::sqrt(squares / (count - 1) / count));
  }
  return Duration{mean, se};
}

}  // namespace wavefount
