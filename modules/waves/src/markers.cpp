#include "wavefount/waves/markers.h"

#include <algorithm>
#include <map>

#include "wavefount/core/robust.h"

namespace wavefount {
namespace {

using Values = std::vector<std::optional<double>>;  // by position in Wave::entries

const Interphase& interphase_of(const WaveEntry& entry, const Interphases& interphases) {
  return interphases.interphases[entry.interphase];
}

std::optional<double> formed_of(const Interphase& interphase) {
  if (interphase.start != Start::seen) return std::nullopt;
  if (interphase.import && interphase.import->formed_min) return interphase.import->formed_min;
  return interphase.formed_min;
}

/// Share of the others' values below the leader's, in per cent.
std::optional<double> percentile(const Values& values, int leader) {
  if (!values[leader]) return std::nullopt;
  double below = 0, others = 0;
  for (int i = 0; i < static_cast<int>(values.size()); ++i) {
    if (i == leader || !values[i]) continue;
    ++others;
    if (*values[i] < *values[leader]) below += 1;
    if (*values[i] == *values[leader]) below += 0.5;
  }
  if (others == 0) return std::nullopt;
  return 100 * below / others;
}

Values initial_imports(const MarkerView& view) {
  Values values;
  for (const int at : view.wave->entries) {
    const auto& interphase = interphase_of(view.entries->entries[at], *view.interphases);
    values.push_back(interphase.import && interphase.start == Start::seen
                         ? std::optional<double>(interphase.import->initial)
                         : std::nullopt);
  }
  return values;
}

Values brightnesses(const MarkerView& view) {
  Values values;
  for (const int at : view.wave->entries)
    values.push_back(view.entries->entries[at].brightness_at_age);
  return values;
}

Values territories_of(const MarkerView& view) {
  std::map<int, std::optional<double>> by_nucleus;
  const auto count = std::min(view.nuclei->nuclei.size(), view.territories->territory_um2.size());
  for (std::size_t i = 0; i < count; ++i)
    by_nucleus[view.nuclei->nuclei[i].id] = view.territories->territory_um2[i];
  Values values;
  for (const int at : view.wave->entries)
    values.push_back(by_nucleus[view.entries->entries[at].nucleus]);
  return values;
}

/// Periods of a wave's nucleus by the number of the mitosis that ends them, those that touch this
/// wave left out.
std::map<int, double> free_periods(int entry, const MarkerView& view) {
  std::map<int, double> periods;
  for (const auto& station : view.chronology->stations) {
    const auto& own = station.entries;
    if (std::find(own.begin(), own.end(), entry) == own.end()) continue;
    const WaveEntry* before = nullptr;
    for (const int at : own) {
      const auto& now = view.entries->entries[at];
      if (now.cycle == 0) continue;
      const int cycle = view.wave->cycle;
      if (before != nullptr && now.cycle == before->cycle + 1 && now.cycle != cycle &&
          before->cycle != cycle)
        periods[now.cycle] = now.time_min - before->time_min;
      before = &now;
    }
  }
  return periods;
}

std::map<int, std::vector<double>> periods_by_cycle(const std::vector<int>& members,
                                                    const MarkerView& view) {
  std::map<int, std::vector<double>> by_cycle;
  for (const int member : members)
    for (const auto& [cycle, period] : free_periods(view.wave->entries[member], view))
      by_cycle[cycle].push_back(period);
  return by_cycle;
}

/// Median over the cycles of the leader's period over a quantile of the others' in the same cycle.
std::optional<double> ratio_to(double share, const std::map<int, double>& own,
                               const std::map<int, std::vector<double>>& by_cycle) {
  constexpr std::size_t least_nuclei = 3;
  std::vector<double> ratios;
  for (const auto& [cycle, period] : own) {
    const auto at = by_cycle.find(cycle);
    if (at != by_cycle.end() && at->second.size() >= least_nuclei)
      ratios.push_back(period / quantile(at->second, share));
  }
  if (ratios.empty()) return std::nullopt;
  return median(std::move(ratios));
}

}  // namespace

void set_brightness_at_age(const Wave& wave, WaveEntries& entries, const Interphases& interphases) {
  std::vector<double> lengths;
  for (const int at : wave.entries) {
    const auto& entry = entries.entries[at];
    if (const auto formed = formed_of(interphase_of(entry, interphases)))
      lengths.push_back(entry.time_min - *formed);
  }
  if (lengths.empty()) return;
  const double usual = median(lengths);
  double shortest = usual;
  // An interphase of less than half the usual length is a broken track, not a short cycle.
  for (const double length : lengths)
    if (length > usual / 2) shortest = std::min(shortest, length);
  constexpr double share = 0.8;
  for (const int at : wave.entries) {
    auto& entry = entries.entries[at];
    const auto& interphase = interphase_of(entry, interphases);
    const auto formed = formed_of(interphase);
    if (formed && interphase.import)
      entry.brightness_at_age = interphase.import->brightness_at(*formed + share * shortest);
  }
}

void set_markers(Origin& origin, int leader, const std::vector<int>& basin,
                 const MarkerView& view) {
  origin.brightness_percentile = percentile(brightnesses(view), leader);
  origin.import_percentile = percentile(initial_imports(view), leader);
  origin.territory_percentile = percentile(territories_of(view), leader);
  const auto own = free_periods(view.wave->entries[leader], view);
  std::vector<int> all;
  for (int i = 0; i < static_cast<int>(view.wave->entries.size()); ++i) all.push_back(i);
  constexpr double slowest_tenth = 0.9;
  origin.period_ratio = ratio_to(0.5, own, periods_by_cycle(basin, view));
  origin.period_ratio_slowest = ratio_to(slowest_tenth, own, periods_by_cycle(all, view));
}

}  // namespace wavefount
