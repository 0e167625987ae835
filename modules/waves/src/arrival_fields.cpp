#include "wavefount/waves/arrival_fields.h"

#include <algorithm>
#include <cmath>

#include "wavefount/core/robust.h"
#include "wavefount/waves/candidates.h"

namespace wavefount {
namespace {

constexpr double curved_from_spacings = 2;  // tubes wider than this have walls apart from ends
constexpr std::size_t least_for_field = 5;

double square(double value) {
  return value * value;
}

/// Points of open edges nearest to a place.
std::vector<Point> open_feet(Point place, const Tube& tube, bool wide) {
  std::vector<Point> feet;
  if (tube.left_end == Boundary::open) feet.push_back({0, place.y});
  if (tube.right_end == Boundary::open) feet.push_back({tube.length_um, place.y});
  if (wide && tube.upper_wall == Boundary::open) feet.push_back({place.x, -tube.width_um / 2});
  if (wide && tube.lower_wall == Boundary::open) feet.push_back({place.x, tube.width_um / 2});
  return feet;
}

bool nearest_to(Point foot, int which, const std::vector<Point>& places) {
  const auto off = [&](int i) {
    return square(places[i].x - foot.x) + square(places[i].y - foot.y);
  };
  for (int i = 0; i < static_cast<int>(places.size()); ++i)
    if (i != which && off(i) < off(which)) return false;
  return true;
}

}  // namespace

bool is_wide(const Tube& tube, double spacing_um, const WaveEntries& entries) {
  if (tube.measured) return tube.wide || tube.width_um > curved_from_spacings * spacing_um;
  std::vector<double> across;
  for (const auto& entry : entries.entries) across.push_back(entry.across_um);
  return quantile(across, 0.95) - quantile(across, 0.05) > curved_from_spacings * spacing_um;
}

Arrivals arrivals_of(const Wave& wave, const WaveEntries& entries, const Tube& tube,
                     double spacing_um, bool wide, double least_se_min) {
  // In a tube too narrow for two nuclei side by side the front is a point on a line.
  const bool line = !wide && tube.measured && tube.width_um < spacing_um;
  Arrivals arrivals;
  for (const int at : wave.entries) {
    const auto& entry = entries.entries[at];
    arrivals.places_um.push_back({entry.along_um, line ? 0 : entry.across_um});
    arrivals.times_min.push_back(entry.time_min);
    arrivals.se_min.push_back(std::hypot(entry.se_min, least_se_min));
  }
  constexpr std::size_t least_for_plane = 8;
  arrivals.plane = wide && wave.entries.size() >= least_for_plane;
  return arrivals;
}

std::vector<char> at_view_edge(const Arrivals& arrivals, const Tube& tube, bool wide) {
  std::vector<char> edge(arrivals.places_um.size(), 0);
  for (int i = 0; i < static_cast<int>(edge.size()); ++i) {
    const auto feet = open_feet(arrivals.places_um[i], tube, wide);
    edge[i] = std::any_of(feet.begin(), feet.end(),
                          [&](Point foot) { return nearest_to(foot, i, arrivals.places_um); });
  }
  return edge;
}

double least_prominence_min(const Arrivals& arrivals, const FieldFit& fit,
                            const std::vector<Link>& links, double spacing_um) {
  const auto field = mean_field(arrivals, fit);
  std::vector<double> slopes;
  for (const auto& link : links) {
    if (!link.bridge && link.length_um > 0)
      slopes.push_back(std::abs(field.mean_min[link.a] - field.mean_min[link.b]) / link.length_um);
  }
  constexpr double spacings = 0.5;
  return std::max(spacings * spacing_um * median(slopes), median(field.se_min));
}

Source source_at(Point place_um, int origin, bool at_open_edge, const Tube& tube) {
  Source source{place_um, origin, 0};
  if (!at_open_edge) return source;
  source.origin = 0;
  const bool left = tube.left_end == Boundary::open;
  const bool right = tube.right_end == Boundary::open;
  if (left && (!right || place_um.x < tube.length_um / 2))
    source.side = -1;
  else if (right)
    source.side = 1;
  return source;
}

MeanSources mean_sources(const Arrivals& arrivals, const FieldFit& fit,
                         const std::vector<Link>& links, const Tube& tube, bool wide,
                         double spacing_um) {
  const auto edge = at_view_edge(arrivals, tube, wide);
  MeanSources result;
  if (fit.scales.empty() || arrivals.times_min.size() < least_for_field) {
    const auto first = std::min_element(arrivals.times_min.begin(), arrivals.times_min.end());
    const auto at = first - arrivals.times_min.begin();
    result.sources.push_back(source_at(arrivals.places_um[at], 1, edge[at], tube));
    result.basin.assign(arrivals.times_min.size(), 0);
    return result;
  }
  const auto field = mean_field(arrivals, fit);
  const auto basins = find_minima(field.mean_min, field_graph(arrivals.places_um.size(), links),
                                  least_prominence_min(arrivals, fit, links, spacing_um));
  for (int i = 0; i < static_cast<int>(basins.minima.size()); ++i) {
    const int place = basins.minima[i].place;
    result.sources.push_back(source_at(arrivals.places_um[place], i + 1, edge[place], tube));
  }
  result.basin = basins.basin;
  return result;
}

}  // namespace wavefount
