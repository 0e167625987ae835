#include "wavefount/waves/territories.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <utility>

#include "wavefount/core/robust.h"
#include "wavefount/waves/neighbours.h"

namespace wavefount {
namespace {

/// The part of a polygon nearer to `own` than to `other`.
Polygon nearer_part(const Polygon& polygon, Point own, Point other) {
  const double nx = other.x - own.x;
  const double ny = other.y - own.y;
  const double limit = (nx * (own.x + other.x) + ny * (own.y + other.y)) / 2;
  const auto beyond = [&](Point p) { return nx * p.x + ny * p.y - limit; };
  Polygon part;
  for (std::size_t i = 0, j = polygon.size() - 1; i < polygon.size(); j = i++) {
    const double from = beyond(polygon[j]);
    const double to = beyond(polygon[i]);
    if ((from <= 0) != (to <= 0)) {
      const double share = from / (from - to);
      part.push_back({polygon[j].x + share * (polygon[i].x - polygon[j].x),
                      polygon[j].y + share * (polygon[i].y - polygon[j].y)});
    }
    if (to <= 0) part.push_back(polygon[i]);
  }
  return part;
}

double clipped_area(Polygon polygon, Point own, const std::vector<Point>& others) {
  for (const auto& other : others) {
    if (polygon.size() < 3) return 0;
    polygon = nearer_part(polygon, own, other);
  }
  return polygon.size() < 3 ? 0 : std::abs(twice_signed_area(polygon)) / 2;
}

struct Moment {
  std::vector<int> nuclei;
  std::vector<Point> places;
};

Moment present_at(const Nuclei& nuclei, double time_min) {
  Moment moment;
  for (int i = 0; i < static_cast<int>(nuclei.nuclei.size()); ++i) {
    if (const auto place = place_at(nuclei.nuclei[i], time_min)) {
      moment.nuclei.push_back(i);
      moment.places.push_back(*place);
    }
  }
  return moment;
}

std::optional<double> median_or_empty(std::vector<double> values) {
  if (values.empty()) return std::nullopt;
  return median(std::move(values));
}

}  // namespace

std::optional<Point> place_at(const Nucleus& nucleus, double time_min) {
  const auto& points = nucleus.points;
  if (points.empty() || time_min < points.front().time_min || time_min > points.back().time_min)
    return std::nullopt;
  const auto later =
      std::lower_bound(points.begin(), points.end(), time_min,
                       [](const TracePoint& point, double time) { return point.time_min < time; });
  auto nearest = later;
  if (later != points.begin() && time_min - std::prev(later)->time_min < later->time_min - time_min)
    nearest = std::prev(later);
  return Point{nearest->x_um, nearest->y_um};
}

std::vector<double> voronoi_areas_um2(const std::vector<Point>& places_um, const Tube& tube) {
  std::vector<double> areas(places_um.size(), 0.0);
  if (tube.outline_um.size() < 3) return areas;
  std::vector<std::vector<Point>> around(places_um.size());
  for (const auto& link : delaunay_links(places_um)) {
    if (link.length_um == 0) continue;
    around[link.a].push_back(places_um[link.b]);
    around[link.b].push_back(places_um[link.a]);
  }
  for (std::size_t i = 0; i < places_um.size(); ++i) {
    areas[i] = clipped_area(tube.outline_um, places_um[i], around[i]);
    for (const auto& hole : tube.holes_um) areas[i] -= clipped_area(hole, places_um[i], around[i]);
    areas[i] = std::max(areas[i], 0.0);
  }
  return areas;
}

Territories measure_territories(const Nuclei& nuclei, const Tube& tube,
                                const std::vector<double>& moments_min) {
  const auto count = nuclei.nuclei.size();
  std::vector<std::vector<double>> areas(count), nearest(count);
  for (const double time : moments_min) {
    const auto moment = present_at(nuclei, time);
    std::vector<double> shortest(moment.places.size(), std::numeric_limits<double>::infinity());
    for (const auto& link : delaunay_links(moment.places)) {
      shortest[link.a] = std::min(shortest[link.a], link.length_um);
      shortest[link.b] = std::min(shortest[link.b], link.length_um);
    }
    const auto cells = voronoi_areas_um2(moment.places, tube);
    for (std::size_t i = 0; i < moment.nuclei.size(); ++i) {
      const int nucleus = moment.nuclei[i];
      if (cells[i] > 0) areas[nucleus].push_back(cells[i]);
      if (std::isfinite(shortest[i])) nearest[nucleus].push_back(shortest[i]);
    }
  }
  Territories territories;
  for (std::size_t i = 0; i < count; ++i) {
    territories.territory_um2.push_back(median_or_empty(std::move(areas[i])));
    territories.nearest_um.push_back(median_or_empty(std::move(nearest[i])));
  }
  return territories;
}

}  // namespace wavefount
