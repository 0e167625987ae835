#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <limits>
#include <opencv2/imgproc.hpp>

#include "wavefount/core/robust.h"
#include "wavefount/tube/smooth.h"
#include "wavefount/tube/tube_shape.h"

namespace wavefount::tube {
namespace {

/// From this ratio of length to width on the principal direction is the tube's; below it the
/// direction of its straight edges counts.
constexpr double long_ratio = 2.5;
constexpr int rounds = 5;

struct Moments {
  Point centre;
  Point direction;
  double ratio = 1;  ///< length over width
};

Moments moments_of(const cv::Mat& region) {
  const auto m = cv::moments(region, true);
  Moments out;
  if (m.m00 <= 0) return out;
  out.centre = {m.m10 / m.m00, m.m01 / m.m00};
  Eigen::Matrix2d spread;
  spread << m.mu20, m.mu11, m.mu11, m.mu02;
  const Eigen::SelfAdjointEigenSolver<Eigen::Matrix2d> axes(spread / m.m00);
  out.direction = {axes.eigenvectors()(0, 1), axes.eigenvectors()(1, 1)};
  out.ratio = std::sqrt(axes.eigenvalues()[1] / std::max(axes.eigenvalues()[0], 1e-9));
  return out;
}

/// Direction of the straight edges inside the image, modulo a right angle; false when they have
/// none in common.
bool edge_direction(const cv::Mat& region, Point& direction) {
  std::vector<std::vector<cv::Point>> contours;
  cv::findContours(region.clone(), contours, cv::RETR_EXTERNAL, cv::CHAIN_APPROX_NONE);
  double cosine = 0;
  double sine = 0;
  double count = 0;
  constexpr std::size_t reach = 7;
  for (const auto& contour : contours) {
    if (contour.size() < 4 * reach) continue;
    for (std::size_t i = 0; i < contour.size(); ++i) {
      const auto& a = contour[i];
      const auto& b = contour[(i + reach) % contour.size()];
      const auto at_border = [&](const cv::Point& p) {
        return p.x < 2 || p.y < 2 || p.x + 2 >= region.cols || p.y + 2 >= region.rows;
      };
      if (at_border(a) || at_border(b)) continue;
      const double angle = std::atan2(b.y - a.y, b.x - a.x);
      cosine += std::cos(4 * angle);
      sine += std::sin(4 * angle);
      count += 1;
    }
  }
  if (count < 20 || std::hypot(cosine, sine) < 0.4 * count) return false;
  const double angle = std::atan2(sine, cosine) / 4;
  direction = {std::cos(angle), std::sin(angle)};
  return true;
}

/// Extent of the region along a direction, robustly.
std::pair<double, double> extent(const cv::Mat& region, Point centre, Point direction) {
  double lowest = std::numeric_limits<double>::infinity();
  double highest = -lowest;
  for (int y = 0; y < region.rows; ++y)
    for (int x = 0; x < region.cols; ++x) {
      if (!region.at<unsigned char>(y, x)) continue;
      const double along = (x - centre.x) * direction.x + (y - centre.y) * direction.y;
      lowest = std::min(lowest, along);
      highest = std::max(highest, along);
    }
  return {lowest, highest};
}

/// Middle and size of the run of the region across each station that lies nearest to the axis.
void cross_sections(const cv::Mat& region, const Axis& axis, double half,
                    std::vector<double>& middle, std::vector<double>& width) {
  const auto sections = straighten(region, axis, half, 1);
  const std::size_t count = axis.size();
  middle.assign(count, 0);
  width.assign(count, 0);
  for (std::size_t i = 0; i < count; ++i) {
    const float* line = sections.values.ptr<float>(static_cast<int>(i));
    double nearest = half;
    for (int column = 0; column < sections.values.cols; ++column) {
      if (!(line[column] > 127)) continue;
      const int start = column;
      while (column + 1 < sections.values.cols && line[column + 1] > 127) ++column;
      const double from = sections.across(start);
      const double to = sections.across(column);
      const double away = from <= 0 && to >= 0 ? 0 : std::min(std::abs(from), std::abs(to));
      if (away >= nearest) continue;
      nearest = away;
      middle[i] = (from + to) / 2;
      width[i] = to - from + 1;
    }
  }
}

}  // namespace

Axis rough_axis(const cv::Mat& region) {
  cv::Mat levels;
  region.convertTo(levels, CV_32F);
  const auto moments = moments_of(region);
  Point direction = moments.direction;
  Point straight;
  if (moments.ratio < long_ratio && edge_direction(region, straight)) {
    const Point across{-straight.y, straight.x};
    const auto one = extent(region, moments.centre, straight);
    const auto other = extent(region, moments.centre, across);
    direction = one.second - one.first >= other.second - other.first ? straight : across;
  }
  const auto reach = extent(region, moments.centre, direction);
  const auto point = [&](double along) {
    return Point{moments.centre.x + along * direction.x, moments.centre.y + along * direction.y};
  };
  auto axis = axis_through({point(reach.first), point(reach.second + 1)});
  if (moments.ratio < long_ratio) return axis;
  const double half = static_cast<double>(std::max(region.rows, region.cols)) / 2;
  for (int round = 0; round < rounds; ++round) {
    std::vector<double> middle;
    std::vector<double> width;
    cross_sections(levels, axis, half, middle, width);
    std::vector<double> seen;
    for (const double one : width)
      if (one > 0) seen.push_back(one);
    const double usual = median(std::move(seen));
    // Near an end that is cut off or round the middle says nothing of the axis.
    std::vector<double> weight(width.size(), 0.0);
    for (std::size_t i = 0; i < width.size(); ++i) {
      const double to_end = static_cast<double>(std::min(i, width.size() - 1 - i));
      if (to_end > usual / 2 && width[i] > 0.7 * usual && width[i] < 1.5 * usual) weight[i] = 1;
    }
    const auto curve = smooth_robust(middle, weight, std::max(3 * usual, 30.0));
    Polygon moved;
    for (std::size_t i = 0; i < axis.size(); ++i)
      moved.push_back(axis.place(static_cast<double>(i), curve[i]));
    axis = axis_through(moved);
  }
  return axis;
}

}  // namespace wavefount::tube
