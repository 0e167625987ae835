#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <limits>
#include <opencv2/imgproc.hpp>

#include "wavefount/core/robust.h"
#include "wavefount/core/tube.h"
#include "wavefount/tube/tube_shape.h"

namespace wavefount::tube {
namespace {

/// Overlap of region and ellipse (common over joint area) from which on it is one: a rectangle
/// reaches 0.83, a tube with round ends three times as long as wide 0.93.
constexpr double least_overlap = 0.95;
/// Longer ones are tubes whatever their ends look like.
constexpr double longest_ratio = 4;
/// Share of the contour at the image's border that an embryo in view may have.
constexpr double most_at_border = 0.05;

struct Ellipse {
  Eigen::Vector2d centre;
  Eigen::Matrix2d axes;  ///< columns: minor, major direction
  Eigen::Vector2d half;  ///< minor, major half axis
};

Ellipse ellipse_of(const cv::Mat& region) {
  const auto m = cv::moments(region, true);
  Ellipse ellipse;
  ellipse.centre = {m.m10 / m.m00, m.m01 / m.m00};
  Eigen::Matrix2d spread;
  spread << m.mu20, m.mu11, m.mu11, m.mu02;
  const Eigen::SelfAdjointEigenSolver<Eigen::Matrix2d> solved(spread / m.m00);
  ellipse.axes = solved.eigenvectors();
  ellipse.half = 2 * solved.eigenvalues().cwiseMax(1e-9).cwiseSqrt();
  return ellipse;
}

double overlap(const cv::Mat& region, const Ellipse& ellipse) {
  double common = 0;
  double joint = 0;
  for (int y = 0; y < region.rows; ++y) {
    for (int x = 0; x < region.cols; ++x) {
      const Eigen::Vector2d away =
          ellipse.axes.transpose() * (Eigen::Vector2d(x, y) - ellipse.centre);
      const bool in_ellipse = away.cwiseQuotient(ellipse.half).squaredNorm() <= 1;
      const bool in_region = region.at<unsigned char>(y, x) > 0;
      common += in_ellipse && in_region;
      joint += in_ellipse || in_region;
    }
  }
  return joint > 0 ? common / joint : 0;
}

std::vector<cv::Point> longest_contour(const cv::Mat& region) {
  std::vector<std::vector<cv::Point>> contours;
  cv::findContours(region.clone(), contours, cv::RETR_EXTERNAL, cv::CHAIN_APPROX_NONE);
  const auto longest =
      std::max_element(contours.begin(), contours.end(),
                       [](const auto& a, const auto& b) { return a.size() < b.size(); });
  return longest == contours.end() ? std::vector<cv::Point>() : *longest;
}

/// The contour as a polygon, smoothed over a few pixels: its steps are no shape.
Polygon soft_ring(const std::vector<cv::Point>& contour) {
  const auto count = static_cast<std::ptrdiff_t>(contour.size());
  constexpr std::ptrdiff_t reach = 6;
  Polygon ring;
  for (std::ptrdiff_t i = 0; i < count; ++i) {
    Point sum;
    for (std::ptrdiff_t k = i - reach; k <= i + reach; ++k) {
      const auto& at = contour[static_cast<std::size_t>((k % count + count) % count)];
      sum.x += at.x;
      sum.y += at.y;
    }
    ring.push_back({sum.x / (2 * reach + 1), sum.y / (2 * reach + 1)});
  }
  return ring;
}

/// The ring's stations with an overlap at both ends, so that the curve closes smoothly.
Axis overlapping(const Axis& ring, std::size_t overlap_px) {
  Axis longer;
  const std::size_t count = ring.size();
  for (std::size_t i = 0; i < count + 2 * overlap_px; ++i) {
    const std::size_t at = (i + count - overlap_px % count) % count;
    longer.points.push_back(ring.points[at]);
    longer.tangents.push_back(ring.tangents[at]);
    longer.normals.push_back(ring.normals[at]);
  }
  return longer;
}

/// The chord of the outline through the centre along the major direction.
Polygon chord(const Polygon& outline, const Ellipse& ellipse) {
  const Eigen::Vector2d major = ellipse.axes.col(1);
  double low = 0;
  double high = 0;
  for (std::size_t i = 0; i < outline.size(); ++i) {
    const Point& a = outline[i];
    const Point& b = outline[(i + 1) % outline.size()];
    const Eigen::Vector2d from = Eigen::Vector2d(a.x, a.y) - ellipse.centre;
    const Eigen::Vector2d to = Eigen::Vector2d(b.x, b.y) - ellipse.centre;
    const double across_from = from.x() * major.y() - from.y() * major.x();
    const double across_to = to.x() * major.y() - to.y() * major.x();
    if ((across_from > 0) == (across_to > 0)) continue;
    const double part = across_from / (across_from - across_to);
    const double along = (from + part * (to - from)).dot(major);
    low = std::min(low, along);
    high = std::max(high, along);
  }
  const Eigen::Vector2d first = ellipse.centre + low * major;
  const Eigen::Vector2d last = ellipse.centre + high * major;
  const auto line = axis_through({{first.x(), first.y()}, {last.x(), last.y()}});
  return {line.points.front(), line.points.back()};
}

}  // namespace

bool looks_like_embryo(const cv::Mat& region) {
  const auto contour = longest_contour(region);
  if (contour.size() < 20) return false;
  const auto at_border = std::count_if(contour.begin(), contour.end(), [&](const cv::Point& p) {
    return p.x < 2 || p.y < 2 || p.x + 2 >= region.cols || p.y + 2 >= region.rows;
  });
  if (static_cast<double>(at_border) > most_at_border * static_cast<double>(contour.size()))
    return false;
  const auto ellipse = ellipse_of(region);
  return ellipse.half[1] < longest_ratio * ellipse.half[0] &&
         overlap(region, ellipse) > least_overlap;
}

TubeShape measure_embryo(const cv::Mat& image, const cv::Mat& region, const ShapeRequest& request) {
  const auto ellipse = ellipse_of(region);
  const auto ring = closed_axis(soft_ring(longest_contour(region)));
  const std::size_t over = std::min<std::size_t>(ring.size() / 2, 60);
  const auto stations = overlapping(ring, over);
  BorderSearch search;
  search.expected.assign(stations.size(), 0.5);
  search.reach = std::clamp(0.2 * ellipse.half[0], 4.0, 12.0);
  search.inside_depth = std::max(4.0, 0.4 * ellipse.half[0]);
  search.outside_depth = 12;
  search.outside_level = request.outside_level;
  search.blur = std::max(2.0, request.thin / 2);
  search.cutoff = std::max(8.0, ellipse.half[0] / 2);
  const auto profiles = straighten(
      image, stations, search.reach + search.blur + std::max(search.inside_depth, 12.0), 0.5);
  const auto border = find_border(profiles, search);
  TubeShape shape;
  shape.wide = true;
  Polygon outline;
  for (std::size_t i = over; i < over + ring.size(); ++i)
    outline.push_back(stations.place(static_cast<double>(i), border.position[i]));
  shape.outline = clipped(outline, image.cols, image.rows);
  shape.axis = chord(shape.outline, ellipse);
  double low = 0;
  double high = 0;
  for (const auto& one : shape.outline) {
    const double across = (Eigen::Vector2d(one.x, one.y) - ellipse.centre).dot(ellipse.axes.col(0));
    low = std::min(low, across);
    high = std::max(high, across);
  }
  shape.width = request.width.value_or(high - low);
  if (border.found_share < 0.7)
    shape.doubts.push_back("The outline shows in only a part of its length.");
  return shape;
}

}  // namespace wavefount::tube
