#include "wavefount/waves/arrival_fields.h"

#include <algorithm>
#include <cmath>

#include "wavefount/core/robust.h"

namespace wavefount {
namespace {

/// From outside when at an open edge; over a wall the front has no side along the tube.
Source source_at(Point place_um, int origin, unsigned edges) {
  Source source{place_um, edges == 0 ? origin : 0, 0};
  if ((edges & left_edge) != 0) source.side = -1;
  if ((edges & right_edge) != 0) source.side = 1;
  return source;
}

}  // namespace

bool is_wide(const Tube& tube, double spacing_um, const WaveEntries& entries) {
  constexpr double wide_from_spacings = 2;
  if (tube.measured) return tube.wide || tube.width_um > wide_from_spacings * spacing_um;
  std::vector<double> across;
  for (const auto& entry : entries.entries) across.push_back(entry.across_um);
  return quantile(across, 0.95) - quantile(across, 0.05) > wide_from_spacings * spacing_um;
}

bool is_line(const Tube& tube, double spacing_um, bool wide) {
  constexpr double line_below_spacings = 1.2;
  return !wide && tube.measured && tube.width_um < line_below_spacings * spacing_um;
}

Arrivals arrivals_of(const Wave& wave, const WaveEntries& entries, bool line, double least_se_min) {
  Arrivals arrivals;
  for (const int at : wave.entries) {
    const auto& entry = entries.entries[at];
    arrivals.places_um.push_back({entry.along_um, line ? 0 : entry.across_um});
    arrivals.times_min.push_back(entry.time_min);
    arrivals.se_min.push_back(std::hypot(entry.se_min, least_se_min));
  }
  return arrivals;
}

std::vector<Source> sources_of(const Arrivals& arrivals, const Candidates& candidates,
                               const Tube& tube, bool wide) {
  const auto edges = view_edges(arrivals, tube, wide);
  std::vector<Source> sources;
  for (const auto& candidate : candidates.found) {
    if (candidate.probability < 0.5) break;
    const auto edge = candidate.at_view_edge ? edges[candidate.leader] : 0U;
    sources.push_back(source_at(candidate.place_um, static_cast<int>(sources.size()) + 1, edge));
  }
  if (!sources.empty() || arrivals.times_min.empty()) return sources;
  const auto first = std::min_element(arrivals.times_min.begin(), arrivals.times_min.end());
  const auto at = first - arrivals.times_min.begin();
  return {source_at(arrivals.places_um[at], 1, edges[at])};
}

}  // namespace wavefount
