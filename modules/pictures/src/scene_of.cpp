#include "scene_of.h"

#include <algorithm>
#include <cmath>
#include <limits>

#include "wavefount/core/observations.h"

namespace wavefount {
namespace {

constexpr double gap = 24;  // pixels between panels
/// Panels of this share of the largest possible size are taken where they fill the width better.
constexpr double good_enough = 0.6;

Panels arranged_in(int columns, int count, double width, double height, const Box& room,
                   double heading) {
  Panels panels;
  panels.columns = columns;
  panels.rows = (count + columns - 1) / columns;
  panels.cell_width = (room.width - (columns - 1) * gap) / columns;
  const double cell_height = (room.height - (panels.rows - 1) * gap) / panels.rows - heading;
  panels.scale = std::min(panels.cell_width / width, cell_height / height);
  panels.cell_height = height * panels.scale + heading;
  panels.origin = {room.x, room.y};
  panels.heading = heading;
  return panels;
}

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

double Panels::height() const {
  return rows * cell_height + (rows - 1) * gap;
}

Point Panels::corner(int panel) const {
  return {origin.x + (panel % columns) * (cell_width + gap),
          origin.y + (panel / columns) * (cell_height + gap) + heading};
}

Panels arrange(int count, double width, double height, const Box& room, double heading) {
  count = std::max(count, 1);
  double largest = 0;
  for (int columns = 1; columns <= count; ++columns)
    largest = std::max(largest, arranged_in(columns, count, width, height, room, heading).scale);
  Panels chosen;
  for (int columns = 1; columns <= count; ++columns) {
    const auto panels = arranged_in(columns, count, width, height, room, heading);
    if (panels.scale >= good_enough * largest) chosen = panels;
  }
  return chosen;
}

}  // namespace wavefount
