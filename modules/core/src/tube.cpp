#include "wavefount/core/tube.h"

#include <algorithm>
#include <cmath>
#include <limits>

namespace wavefount {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

struct AxisFoot {
  double along = 0;
  double across = 0;
};

/// Foot of the perpendicular on a polyline; the first and last segments are continued outwards so
/// that places beyond an end keep their distance along.
AxisFoot foot_on(const Polygon& axis, Point place) {
  AxisFoot best;
  double nearest = infinity;
  double start = 0;
  for (std::size_t i = 0; i + 1 < axis.size(); ++i) {
    const double dx = axis[i + 1].x - axis[i].x;
    const double dy = axis[i + 1].y - axis[i].y;
    const double length = std::hypot(dx, dy);
    if (length == 0) continue;
    const double px = place.x - axis[i].x;
    const double py = place.y - axis[i].y;
    double along = (px * dx + py * dy) / length;
    if (i > 0) along = std::max(along, 0.0);
    if (i + 2 < axis.size()) along = std::min(along, length);
    const double distance = std::hypot(px - along * dx / length, py - along * dy / length);
    if (distance < nearest) {
      nearest = distance;
      best.along = start + along;
      best.across = std::copysign(distance, dx * py - dy * px);
    }
    start += length;
  }
  return best;
}

bool upright(const Polygon& axis) {
  return std::abs(axis.back().y - axis.front().y) > std::abs(axis.back().x - axis.front().x);
}

}  // namespace

double twice_signed_area(const Polygon& polygon) {
  double sum = 0;
  for (std::size_t i = 0, j = polygon.size() - 1; i < polygon.size(); j = i++)
    sum += polygon[j].x * polygon[i].y - polygon[i].x * polygon[j].y;
  return sum;
}

bool inside(const Polygon& polygon, Point place) {
  bool in = false;
  for (std::size_t i = 0, j = polygon.size() - 1; i < polygon.size(); j = i++) {
    const Point& a = polygon[i];
    const Point& b = polygon[j];
    if ((a.y > place.y) != (b.y > place.y) &&
        place.x < (b.x - a.x) * (place.y - a.y) / (b.y - a.y) + a.x)
      in = !in;
  }
  return in;
}

double segment_distance(Point place, Point from, Point to) {
  const double dx = to.x - from.x;
  const double dy = to.y - from.y;
  const double squared = dx * dx + dy * dy;
  double share = 0;
  if (squared > 0)
    share = std::clamp(((place.x - from.x) * dx + (place.y - from.y) * dy) / squared, 0.0, 1.0);
  return std::hypot(place.x - from.x - share * dx, place.y - from.y - share * dy);
}

double polygon_distance(const Polygon& polygon, Point place) {
  double nearest = infinity;
  for (std::size_t i = 0, j = polygon.size() - 1; i < polygon.size(); j = i++)
    nearest = std::min(nearest, segment_distance(place, polygon[j], polygon[i]));
  return nearest;
}

bool Tube::contains(Point place_um) const {
  if (!inside(outline_um, place_um)) return false;
  return std::none_of(holes_um.begin(), holes_um.end(),
                      [&](const Polygon& hole) { return inside(hole, place_um); });
}

TubePlace Tube::place(Point place_um) const {
  TubePlace place;
  if (axis_um.size() < 2) return place;
  const auto foot = foot_on(axis_um, place_um);
  place.along_um = foot.along;
  // In image coordinates (y down) a left-to-right axis has its positive side below; a
  // top-to-bottom axis has it on the left, where the contract wants the right.
  place.across_um = upright(axis_um) ? -foot.across : foot.across;
  const double to_left = foot.along;
  const double to_right = length_um - foot.along;
  const auto nearer = [&](Boundary kind) {
    double nearest = infinity;
    if (left_end == kind) nearest = std::min(nearest, to_left);
    if (right_end == kind) nearest = std::min(nearest, to_right);
    return nearest;
  };
  place.end_distance_um = nearer(Boundary::closed);
  place.open_distance_um = nearer(Boundary::open);
  place.wall_distance_um = infinity;
  if (upper_wall == Boundary::closed)
    place.wall_distance_um = std::min(place.wall_distance_um, width_um / 2 + place.across_um);
  if (lower_wall == Boundary::closed)
    place.wall_distance_um = std::min(place.wall_distance_um, width_um / 2 - place.across_um);
  return place;
}

double Tube::edge_distance_um(Point place_um) const {
  double nearest = polygon_distance(outline_um, place_um);
  for (const auto& hole : holes_um) nearest = std::min(nearest, polygon_distance(hole, place_um));
  return contains(place_um) ? nearest : -nearest;
}

double Tube::area_um2() const {
  double area = std::abs(twice_signed_area(outline_um)) / 2;
  for (const auto& hole : holes_um) area -= std::abs(twice_signed_area(hole)) / 2;
  return area;
}

}  // namespace wavefount
