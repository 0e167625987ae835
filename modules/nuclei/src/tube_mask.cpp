#include "wavefount/nuclei/tube_mask.h"

#include <algorithm>
#include <cmath>
#include <opencv2/imgproc.hpp>
#include <vector>

namespace wavefount::nuclei {
namespace {

/// Fraction bits of polygon corners handed to OpenCV.
constexpr int corner_bits = 6;
/// OpenCV's fixed-point edges overflow beyond this many pixels.
constexpr double farthest_px = 30000;
/// Labels are bytes; a field holds a handful of tubes.
constexpr std::size_t most_tubes = 254;

class Painter {
 public:
  Painter(const ReducedGrid& grid, double pixel_um, double shift_x_px, double shift_y_px)
      : grid_(grid), pixel_um_(pixel_um), shift_x_px_(shift_x_px), shift_y_px_(shift_y_px) {}

  void fill(cv::Mat1b& pixels, const Polygon& polygon_um, int label) const {
    if (polygon_um.size() < 3) return;
    std::vector<cv::Point> corners;
    corners.reserve(polygon_um.size());
    for (const Point& place : polygon_um)
      corners.emplace_back(fixed(grid_.column(place.x / pixel_um_ + shift_x_px_)),
                           fixed(grid_.row(place.y / pixel_um_ + shift_y_px_)));
    cv::fillPoly(pixels, std::vector<std::vector<cv::Point>>{corners}, cv::Scalar(label),
                 cv::LINE_8, corner_bits);
  }

 private:
  static int fixed(double pixel) {
    const double held = std::clamp(pixel, -farthest_px, farthest_px);
    return static_cast<int>(std::lround(held * (1 << corner_bits)));
  }

  ReducedGrid grid_;
  double pixel_um_, shift_x_px_, shift_y_px_;
};

}  // namespace

TubeMask::TubeMask(const Tubes& tubes, const ReducedGrid& grid, double pixel_um, double shift_x_px,
                   double shift_y_px)
    : grid_(grid), pixels_(grid.height, grid.width, static_cast<unsigned char>(0)) {
  if (tubes.tubes.empty()) {
    pixels_.setTo(1);
    return;
  }
  const Painter painter(grid, pixel_um, shift_x_px, shift_y_px);
  const std::size_t count = std::min(tubes.tubes.size(), most_tubes);
  for (std::size_t i = 0; i < count; ++i) {
    const Tube& tube = tubes.tubes[i];
    if (tube.measured)
      painter.fill(pixels_, tube.outline_um, static_cast<int>(i) + 1);
    else
      pixels_.setTo(static_cast<int>(i) + 1);
  }
  for (std::size_t i = 0; i < count; ++i)
    for (const Polygon& hole : tubes.tubes[i].holes_um) painter.fill(pixels_, hole, 0);
  // fillPoly paints the pixels that an edge cuts as well.
  cv::erode(pixels_, pixels_, cv::Mat());
}

}  // namespace wavefount::nuclei
