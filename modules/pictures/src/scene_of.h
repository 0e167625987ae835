#pragma once

#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/core/record_store.h"
#include "wavefount/core/tube.h"
#include "wavefount/pictures/plot.h"

namespace wavefount {

/// The tube, or, where there is none to speak of, the whole field as one.
Tube tube_or_field(const RecordStore& records);

/// Side of a pixel, µm; 1 where it is not known.
double pixel_um_of(const FilmDescription& film);

/// What the drift moved a frame by, full-size pixels; zero without drift.
Point drift_px_of(const RecordStore& records, int frame);

/// Smallest upright rectangle around a polygon.
Box bounds_of(const Polygon& polygon);

/// Cells of equal size for a number of panels of one shape.
struct Panels {
  int columns = 1, rows = 1;
  double scale = 1;  ///< pixels of the picture for one unit of the panel's content
  double cell_width = 0, cell_height = 0;
  Point origin;  ///< of the first cell

  /// Of all rows together.
  double height() const;
  /// Top left of a panel's content.
  Point corner(int panel) const;
  double heading = 0;
};

/// Arranges `count` panels of content `width` × `height` in a picture so that they are about as
/// large as can be, in few rows; each has a heading above it. `room`: where they may lie; its
/// height is an upper limit.
Panels arrange(int count, double width, double height, const Box& room, double heading);

}  // namespace wavefount
