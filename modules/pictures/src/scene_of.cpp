#include "scene_of.h"

#include <algorithm>
#include <cmath>
#include <limits>

#include "wavefount/core/observations.h"

namespace wavefount {
namespace {

constexpr double gap = 24;  // pixels between panels

Tube field_of(const FilmDescription& film) {
  const double pixel_um = pixel_um_of(film);
  const double right = std::max(film.width - 1, 1) * pixel_um;
  const double bottom = std::max(film.height - 1, 1) * pixel_um;
  Tube tube;
  tube.outline_um = {{0, 0}, {right, 0}, {right, bottom}, {0, bottom}};
  const bool upright = bottom > right;
  tube.axis_um = upright ? Polygon{{right / 2, 0}, {right / 2, bottom}}
                         : Polygon{{0, bottom / 2}, {right, bottom / 2}};
  tube.length_um = upright ? bottom : right;
  tube.width_um = upright ? right : bottom;
  return tube;
}

}  // namespace

Tube tube_or_field(const RecordStore& records) {
  const auto* tube = records.peek<Tube>();
  if (tube && tube->axis_um.size() >= 2 && tube->outline_um.size() >= 3 && tube->length_um > 0)
    return *tube;
  return field_of(records.get<FilmDescription>());
}

double pixel_um_of(const FilmDescription& film) {
  return film.pixel_um > 0 ? film.pixel_um : 1;
}

Point drift_px_of(const RecordStore& records, int frame) {
  const auto& drift = records.get_or_empty<Drift>();
  const auto at = static_cast<std::size_t>(frame);
  if (frame < 0 || at >= drift.x_px.size() || at >= drift.y_px.size()) return {};
  return {drift.x_px[at], drift.y_px[at]};
}

Box bounds_of(const Polygon& polygon) {
  constexpr double infinity = std::numeric_limits<double>::infinity();
  Point low{infinity, infinity}, high{-infinity, -infinity};
  for (const auto& point : polygon) {
    low = {std::min(low.x, point.x), std::min(low.y, point.y)};
    high = {std::max(high.x, point.x), std::max(high.y, point.y)};
  }
  return {low.x, low.y, high.x - low.x, high.y - low.y};
}

Point Panels::corner(int panel) const {
  return {origin.x + (panel % columns) * (cell_width + gap),
          origin.y + (panel / columns) * (cell_height + gap) + heading};
}

Panels arrange(int count, double width, double height, const Box& room, double heading) {
  Panels best;
  best.scale = 0;
  for (int columns = 1; columns <= std::max(count, 1); ++columns) {
    const int rows = (std::max(count, 1) + columns - 1) / columns;
    const double cell_width = (room.width - (columns - 1) * gap) / columns;
    const double cell_height = (room.height - (rows - 1) * gap) / rows - heading;
    const double scale = std::min(cell_width / width, cell_height / height);
    if (scale <= best.scale) continue;
    best.columns = columns;
    best.rows = rows;
    best.scale = scale;
    best.cell_width = cell_width;
    best.cell_height = height * scale + heading;
  }
  best.origin = {room.x, room.y};
  best.heading = heading;
  return best;
}

}  // namespace wavefount
