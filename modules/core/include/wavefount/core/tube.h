#pragma once

#include <string>
#include <vector>

#include "wavefount/core/film.h"

namespace wavefount {

/// Where a point lies in its tube, µm.
struct TubePlace {
  double along_um = 0;          ///< from the left end in view, along the axis
  double across_um = 0;         ///< from the axis; positive downwards (to the right if upright)
  double end_distance_um = 0;   ///< to the nearest closed end, along the axis; infinite if none
  double open_distance_um = 0;  ///< to the nearest open end, along the axis; infinite if none
  double wall_distance_um = 0;  ///< to the nearest closed wall; infinite if none
};

/// One tube (or embryo, or the whole field), in µm in the image of the first frame, drift removed,
/// from the centre of the top-left pixel.
struct Tube {
  static constexpr const char* record_name = "tube";

  int index = 0;          ///< from 0; the film's first tube carries the film's own name
  bool measured = false;  ///< false: no outline found or wanted, the whole field stands for it
  bool wide = false;      ///< an outline such as an embryo's whose ends and walls are one curve
  Polygon outline_um;     ///< closed, without repeating the first point
  std::vector<Polygon> holes_um;  ///< bubbles and excluded regions
  Polygon axis_um;                ///< polyline from the left (top) end to the right (bottom) end
  double width_um = 0;
  double length_um = 0;  ///< of the axis
  Boundary left_end = Boundary::closed, right_end = Boundary::closed;
  Boundary upper_wall = Boundary::closed, lower_wall = Boundary::closed;
  std::vector<std::string> doubts;  ///< sentences for the review list

  /// Inside the outline and outside the holes.
  bool contains(Point place_um) const;
  TubePlace place(Point place_um) const;
  /// Distance to the nearest outline or hole edge, µm, positive inside, negative outside.
  double edge_distance_um(Point place_um) const;
  /// Area inside the outline less the holes, µm².
  double area_um2() const;
};

/// All tubes of one film.
struct Tubes {
  static constexpr const char* record_name = "tubes";
  std::vector<Tube> tubes;
};

/// Twice the signed area of a polygon, µm²; positive when clockwise in image coordinates.
double twice_signed_area(const Polygon& polygon);
bool inside(const Polygon& polygon, Point place);
/// Distance from a point to a segment.
double segment_distance(Point place, Point from, Point to);
/// Distance from a point to the nearest edge of a closed polygon.
double polygon_distance(const Polygon& polygon, Point place);

}  // namespace wavefount
