#include "wavefount/waves/sites.h"

#include <cmath>
#include <limits>

namespace wavefount {
namespace {

/// The foot on the axis at a distance along it, and the direction there; the first and last
/// segments are continued outwards.
struct AxisFoot {
  Point place;
  double dx = 1, dy = 0;
};

AxisFoot foot_at(const Polygon& axis, double along_um) {
  AxisFoot foot;
  double start = 0;
  for (std::size_t i = 0; i + 1 < axis.size(); ++i) {
    const double dx = axis[i + 1].x - axis[i].x;
    const double dy = axis[i + 1].y - axis[i].y;
    const double length = std::hypot(dx, dy);
    if (length == 0) continue;
    const double off = along_um - start;
    foot = {
        {axis[i].x + off * dx / length, axis[i].y + off * dy / length}, dx / length, dy / length};
    if (off <= length) break;
    start += length;
  }
  return foot;
}

}  // namespace

Site site_of(const TubePlace& place, double spacing_um, bool wide) {
  if (place.end_distance_um <= spacing_um) return Site::end;
  if (wide && place.wall_distance_um <= spacing_um / 2) return Site::wall;
  return Site::interior;
}

Point image_place(Point along_across_um, const Tube& tube) {
  if (tube.axis_um.size() < 2) return along_across_um;
  const auto foot = foot_at(tube.axis_um, along_across_um.x);
  const Point below{foot.place.x - along_across_um.y * foot.dy,
                    foot.place.y + along_across_um.y * foot.dx};
  // Which side counts as positive depends on how the tube stands; ask the tube itself.
  const bool same = tube.place(below).across_um * along_across_um.y >= 0;
  if (same) return below;
  return {foot.place.x + along_across_um.y * foot.dy, foot.place.y - along_across_um.y * foot.dx};
}

TubePlace straight_place(Point along_across_um, const Tube& tube) {
  if (tube.axis_um.size() < 2) {
    constexpr double infinity = std::numeric_limits<double>::infinity();
    return {along_across_um.x, along_across_um.y, infinity, infinity, infinity};
  }
  return tube.place(image_place(along_across_um, tube));
}

}  // namespace wavefount
