#include "wavefount/tube/axis.h"

#include <algorithm>
#include <cmath>
#include <limits>

#include "wavefount/core/tube.h"

namespace wavefount::tube {
namespace {

std::vector<Point> resampled(const Polygon& polyline, double spacing) {
  std::vector<double> along{0};
  for (std::size_t i = 1; i < polyline.size(); ++i)
    along.push_back(along.back() + std::hypot(polyline[i].x - polyline[i - 1].x,
                                              polyline[i].y - polyline[i - 1].y));
  const int count = std::max(2, static_cast<int>(std::floor(along.back() / spacing)) + 1);
  std::vector<Point> points;
  std::size_t at = 1;
  for (int k = 0; k < count; ++k) {
    const double wanted = along.back() * k / (count - 1);
    while (at + 1 < along.size() && along[at] < wanted) ++at;
    const double step = along[at] - along[at - 1];
    const double part = step > 0 ? (wanted - along[at - 1]) / step : 0;
    points.push_back({polyline[at - 1].x + part * (polyline[at].x - polyline[at - 1].x),
                      polyline[at - 1].y + part * (polyline[at].y - polyline[at - 1].y)});
  }
  return points;
}

/// Tangents by differences over a few points; normals to the given side.
void set_directions(Axis& axis, bool closed, double side) {
  const auto count = static_cast<std::ptrdiff_t>(axis.points.size());
  const std::ptrdiff_t reach = std::min<std::ptrdiff_t>(5, std::max<std::ptrdiff_t>(1, count / 2));
  axis.tangents.clear();
  axis.normals.clear();
  for (std::ptrdiff_t i = 0; i < count; ++i) {
    const auto at = [&](std::ptrdiff_t k) {
      const auto wrapped =
          closed ? (k % count + count) % count : std::clamp<std::ptrdiff_t>(k, 0, count - 1);
      return axis.points[static_cast<std::size_t>(wrapped)];
    };
    const Point before = at(i - reach);
    const Point after = at(i + reach);
    const double length = std::max(std::hypot(after.x - before.x, after.y - before.y), 1e-12);
    const Point tangent{(after.x - before.x) / length, (after.y - before.y) / length};
    axis.tangents.push_back(tangent);
    axis.normals.push_back({-side * tangent.y, side * tangent.x});
  }
}

bool upright(const std::vector<Point>& points) {
  return std::abs(points.back().y - points.front().y) >
         std::abs(points.back().x - points.front().x);
}

}  // namespace

Point Axis::place(double station, double across) const {
  const double last = static_cast<double>(points.size() - 1);
  const auto below =
      static_cast<std::size_t>(std::clamp(std::floor(station), 0.0, std::max(0.0, last - 1)));
  const double part = station - static_cast<double>(below);
  const auto above = std::min(below + 1, points.size() - 1);
  const Point& a = points[below];
  const Point& b = points[above];
  const double inner = std::clamp(part, 0.0, 1.0);
  const Point n{normals[below].x + inner * (normals[above].x - normals[below].x),
                normals[below].y + inner * (normals[above].y - normals[below].y)};
  return {a.x + part * (b.x - a.x) + across * n.x, a.y + part * (b.y - a.y) + across * n.y};
}

Axis axis_through(const Polygon& polyline) {
  Axis axis;
  axis.points = resampled(polyline, 1);
  const bool stands = upright(axis.points);
  const double forward = stands ? axis.points.back().y - axis.points.front().y
                                : axis.points.back().x - axis.points.front().x;
  if (forward < 0) std::reverse(axis.points.begin(), axis.points.end());
  set_directions(axis, false, stands ? -1 : 1);
  return axis;
}

Axis closed_axis(const Polygon& outline) {
  Polygon ring = outline;
  ring.push_back(outline.front());
  Axis axis;
  axis.points = resampled(ring, 1);
  axis.points.pop_back();
  // Clockwise in the image (positive area), the outside lies to the left of the tangent.
  set_directions(axis, true, twice_signed_area(outline) > 0 ? -1 : 1);
  return axis;
}

Axis extended(const Axis& axis, double by_px, double over_px) {
  const auto count = axis.points.size();
  const auto over = std::clamp<std::size_t>(static_cast<std::size_t>(over_px), 1, count - 1);
  const auto direction = [](const Point& from, const Point& to) {
    const double length = std::max(std::hypot(to.x - from.x, to.y - from.y), 1e-12);
    return Point{(to.x - from.x) / length, (to.y - from.y) / length};
  };
  const Point first = direction(axis.points[over], axis.points.front());
  const Point last = direction(axis.points[count - 1 - over], axis.points.back());
  Axis longer;
  const int steps = std::max(1, static_cast<int>(std::lround(by_px)));
  for (int k = steps; k > 0; --k)
    longer.points.push_back(
        {axis.points.front().x + k * first.x, axis.points.front().y + k * first.y});
  longer.points.insert(longer.points.end(), axis.points.begin(), axis.points.end());
  for (int k = 1; k <= steps; ++k)
    longer.points.push_back({axis.points.back().x + k * last.x, axis.points.back().y + k * last.y});
  const double side = axis.normals.front().x * -axis.tangents.front().y +
                      axis.normals.front().y * axis.tangents.front().x;
  set_directions(longer, false, side > 0 ? 1 : -1);
  return longer;
}

int Straightened::column(double across_px) const {
  return std::clamp(static_cast<int>(std::lround((across_px + half) / step)), 0, values.cols - 1);
}

Straightened straighten(const cv::Mat& image, const Axis& axis, double half, double step) {
  Straightened out;
  out.step = step;
  const int columns = 2 * static_cast<int>(std::ceil(half / step)) + 1;
  out.half = (columns - 1) / 2 * step;
  out.values.create(static_cast<int>(axis.size()), columns, CV_32FC1);
  const float none = std::numeric_limits<float>::quiet_NaN();
  for (int row = 0; row < out.values.rows; ++row) {
    const Point& at = axis.points[static_cast<std::size_t>(row)];
    const Point& normal = axis.normals[static_cast<std::size_t>(row)];
    float* line = out.values.ptr<float>(row);
    for (int column = 0; column < columns; ++column) {
      const double x = at.x + out.across(column) * normal.x;
      const double y = at.y + out.across(column) * normal.y;
      line[column] = none;
      if (x < -0.5 || y < -0.5 || x > image.cols - 0.5 || y > image.rows - 0.5) continue;
      const double px = std::clamp(x, 0.0, image.cols - 1.0);
      const double py = std::clamp(y, 0.0, image.rows - 1.0);
      const int left = std::clamp(static_cast<int>(px), 0, std::max(0, image.cols - 2));
      const int top = std::clamp(static_cast<int>(py), 0, std::max(0, image.rows - 2));
      const auto u = static_cast<float>(px - left);
      const auto v = static_cast<float>(py - top);
      const int right = std::min(left + 1, image.cols - 1);
      const float* upper = image.ptr<float>(top);
      const float* lower = image.ptr<float>(std::min(top + 1, image.rows - 1));
      line[column] = (1 - v) * ((1 - u) * upper[left] + u * upper[right]) +
                     v * ((1 - u) * lower[left] + u * lower[right]);
    }
  }
  return out;
}

Straightened averaged_along(const Straightened& straightened, int reach) {
  Straightened out = straightened;
  const cv::Mat& in = straightened.values;
  out.values = cv::Mat(in.size(), CV_32FC1);
  for (int row = 0; row < in.rows; ++row) {
    for (int column = 0; column < in.cols; ++column) {
      double sum = 0;
      int count = 0;
      for (int k = std::max(0, row - reach); k <= std::min(in.rows - 1, row + reach); ++k) {
        const float value = in.at<float>(k, column);
        if (!std::isfinite(value)) continue;
        sum += value;
        ++count;
      }
      out.values.at<float>(row, column) =
          count > reach ? static_cast<float>(sum / count) : std::numeric_limits<float>::quiet_NaN();
    }
  }
  return out;
}

namespace {

void keep_far(const Polygon& line, std::size_t first, std::size_t last, double tolerance,
              std::vector<bool>& kept) {
  double farthest = tolerance;
  std::size_t at = 0;
  for (std::size_t i = first + 1; i < last; ++i) {
    const double distance = segment_distance(line[i], line[first], line[last]);
    if (distance <= farthest) continue;
    farthest = distance;
    at = i;
  }
  if (at == 0) return;
  kept[at] = true;
  keep_far(line, first, at, tolerance, kept);
  keep_far(line, at, last, tolerance, kept);
}

}  // namespace

Polygon simplified(const Polygon& polyline, double tolerance) {
  if (polyline.size() < 3) return polyline;
  std::vector<bool> kept(polyline.size(), false);
  kept.front() = kept.back() = true;
  keep_far(polyline, 0, polyline.size() - 1, tolerance, kept);
  Polygon few;
  for (std::size_t i = 0; i < polyline.size(); ++i)
    if (kept[i]) few.push_back(polyline[i]);
  return few;
}

}  // namespace wavefount::tube
