#pragma once

#include <opencv2/core/mat.hpp>
#include <vector>

#include "wavefount/core/film.h"

namespace wavefount::tube {

/// A curve through an image, sampled once a pixel. `normals[i]` points to the positive side of the
/// across coordinate: downwards, or to the right where the whole curve stands upright.
struct Axis {
  std::vector<Point> points;
  std::vector<Point> tangents;
  std::vector<Point> normals;

  std::size_t size() const { return points.size(); }
  /// The image place at a fractional station and a distance across.
  Point place(double station, double across) const;
};

/// The polyline resampled every pixel, oriented as the tables want it: from left to right, or from
/// top to bottom where it stands more upright than 45°. Needs two different points.
Axis axis_through(const Polygon& polyline);

/// A closed curve resampled every pixel, normals outwards.
Axis closed_axis(const Polygon& outline);

/// The axis continued straight by `by_px` at both ends, in the direction of its last `over_px`.
Axis extended(const Axis& axis, double by_px, double over_px);

/// The image along the axis: one row a station, columns from −half to +half every `step` pixels;
/// NaN outside the image. Bilinear.
struct Straightened {
  cv::Mat values;  ///< CV_32FC1
  double half = 0;
  double step = 1;

  double across(int column) const { return column * step - half; }
  int column(double across_px) const;
};

Straightened straighten(const cv::Mat& image, const Axis& axis, double half, double step);

/// Mean along the stations over ± `reach` rows, values that are not numbers left out.
Straightened averaged_along(const Straightened& straightened, int reach);

/// Fewest points that stay within `tolerance` of the polyline (Ramer 1972; Douglas & Peucker 1973).
Polygon simplified(const Polygon& polyline, double tolerance);

}  // namespace wavefount::tube
