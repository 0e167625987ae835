#pragma once

#include <opencv2/core/mat.hpp>
#include <optional>
#include <string>
#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/tube/axis.h"
#include "wavefount/tube/border.h"

namespace wavefount::tube {

/// One tube in reduced pixels.
struct TubeShape {
  Polygon outline;  ///< clipped to the image
  Polygon axis;     ///< from the left (top) end to the right (bottom) end in view
  double width = 0;
  Boundary left_end = Boundary::closed, right_end = Boundary::closed;
  Boundary upper_wall = Boundary::closed, lower_wall = Boundary::closed;
  bool wide = false;
  std::vector<std::string> doubts;  ///< sentences
};

struct ShapeRequest {
  std::optional<double> width;  ///< given, reduced pixels: walls are set at it around the axis
  double thin = 5;              ///< bright lines thinner than this are wall glow, reduced pixels
  double outside_level = 0;     ///< counts, where no outside is in view beside a wall
};

/// A first axis through a region: principal direction, then the middle of its cross-sections, so
/// that bent tubes are followed. Oriented as the tables want it.
Axis rough_axis(const cv::Mat& region);

/// Walls and ends at half height between the local levels inside and outside. `image` in counts,
/// `region` the rough mask of this tube (holes filled).
TubeShape measure_tube(const cv::Mat& image, const cv::Mat& region, const ShapeRequest& request);

/// Whether a region is one closed curve like an embryo's rather than a tube in view: an ellipse of
/// its own moments covers it, and little of it touches the image's border.
bool looks_like_embryo(const cv::Mat& region);

/// The outline of such a region, at half height along its own contour.
TubeShape measure_embryo(const cv::Mat& image, const cv::Mat& region, const ShapeRequest& request);

/// The part of a polygon inside the image, whose pixels reach from −0.5 to size − 0.5
/// (Sutherland & Hodgman 1974).
Polygon clipped(const Polygon& polygon, int width, int height);

}  // namespace wavefount::tube
