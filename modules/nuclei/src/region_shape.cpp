#include "wavefount/nuclei/region_shape.h"

#include <algorithm>
#include <cmath>
#include <opencv2/imgproc.hpp>

namespace wavefount::nuclei {
namespace {

struct Gradient {
  double x = 0, y = 0;
  double size() const { return std::hypot(x, y); }
};

Gradient gradient_at(const cv::Mat1f& image, int x, int y) {
  const int left = std::max(x - 1, 0);
  const int right = std::min(x + 1, image.cols - 1);
  const int up = std::max(y - 1, 0);
  const int down = std::min(y + 1, image.rows - 1);
  return {static_cast<double>(image(y, right) - image(y, left)) / std::max(right - left, 1),
          static_cast<double>(image(down, x) - image(up, x)) / std::max(down - up, 1)};
}

/// What lies around a pixel.
struct Surrounding {
  bool own = false, other = false, free = false;
};

class Walk {
 public:
  Walk(const cv::Mat1i& labels, int label, const cv::Rect& box, const cv::Mat1f& image, double half)
      : labels_(labels), label_(label), box_(box), image_(image), half_(half) {}

  RegionShape run() {
    collect();
    if (shape_.pixels == 0) return shape_;
    find_axes();
    follow_edge();
    return shape_;
  }

 private:
  void collect() {
    double sum_x = 0;
    double sum_y = 0;
    const int right = box_.x + box_.width;
    for (int y = box_.y; y < box_.y + box_.height; ++y) {
      const int* row = labels_[y];
      for (int x = box_.x; x < right; ++x) {
        if (row[x] != label_) continue;
        const int start = x;
        while (x < right && row[x] == label_) ++x;
        const int count = x - start;
        shape_.runs.push_back({static_cast<std::uint16_t>(y), static_cast<std::uint16_t>(start),
                               static_cast<std::uint16_t>(x)});
        shape_.pixels += count;
        sum_x += count * (start + x - 1) / 2.0;
        sum_y += static_cast<double>(count) * y;
      }
    }
    if (shape_.pixels == 0) return;
    shape_.x = sum_x / shape_.pixels;
    shape_.y = sum_y / shape_.pixels;
  }

  void find_axes() {
    double xx = 0;
    double yy = 0;
    double xy = 0;
    for (const Run& run : shape_.runs) {
      const double dy = run.y - shape_.y;
      for (int x = run.x0; x < run.x1; ++x) {
        const double dx = x - shape_.x;
        xx += dx * dx;
        yy += dy * dy;
        xy += dx * dy;
      }
    }
    // A pixel's own extent keeps a row of single pixels from being infinitely slender.
    const double own = shape_.pixels / 12.0;
    const double mean = (xx + yy) / 2 + own;
    const double spread = std::hypot((xx - yy) / 2, xy);
    shape_.slenderness = std::sqrt((mean + spread) / std::max(mean - spread, own));
  }

  Surrounding around(int x, int y) const {
    Surrounding found;
    const auto look = [&](int to_x, int to_y) {
      if (to_x < 0 || to_y < 0 || to_x >= labels_.cols || to_y >= labels_.rows) return;
      const int label = labels_(to_y, to_x);
      if (label == label_)
        found.own = true;
      else if (label < 0)
        found.free = true;
      else
        found.other = true;
    };
    look(x - 1, y);
    look(x + 1, y);
    look(x, y - 1);
    look(x, y + 1);
    return found;
  }

  /// Adds up the covered shares of the pixels inside and just outside of the contour, and how steep
  /// the image is where the contour passes.
  void follow_edge() {
    const int y0 = std::max(0, box_.y - 1);
    const int y1 = std::min(labels_.rows - 1, box_.y + box_.height);
    const int x0 = std::max(0, box_.x - 1);
    const int x1 = std::min(labels_.cols - 1, box_.x + box_.width);
    double slopes = 0;
    int crossed = 0;
    for (int y = y0; y <= y1; ++y) {
      for (int x = x0; x <= x1; ++x) {
        const int label = labels_(y, x);
        if (label != label_ && label >= 0) continue;
        const Surrounding near = around(x, y);
        const bool inner = label == label_;
        if (inner && near.other) shape_.split = true;
        if (inner ? !near.free : !near.own) {
          shape_.area += inner ? 1 : 0;
          continue;
        }
        const Gradient gradient = gradient_at(image_, x, y);
        const double over = static_cast<double>(image_(y, x)) - half_;
        shape_.area += covered(over, gradient.size(), inner);
        if (std::abs(over) > 0.5 * gradient.size()) continue;
        slopes += outward(gradient, x, y);
        ++crossed;
      }
    }
    shape_.slope = crossed > 0 ? slopes / crossed : 0;
  }

  static double covered(double over, double steepness, bool inner) {
    if (steepness <= 0) return inner ? 1 : 0;
    return std::clamp(0.5 + over / steepness, 0.0, 1.0);
  }

  /// Fall of brightness away from the centroid: noise averages out in it, in a length it would not.
  double outward(const Gradient& gradient, int x, int y) const {
    const double dx = x - shape_.x;
    const double dy = y - shape_.y;
    const double distance = std::hypot(dx, dy);
    return distance > 0 ? -(gradient.x * dx + gradient.y * dy) / distance : 0;
  }

  const cv::Mat1i& labels_;
  int label_;
  cv::Rect box_;
  const cv::Mat1f& image_;
  double half_;
  RegionShape shape_;
};

}  // namespace

RegionShape shape_of(const cv::Mat1i& labels, int label, const cv::Rect& box,
                     const cv::Mat1f& image, double half) {
  return Walk(labels, label, box, image, half).run();
}

double wide_slope(const cv::Mat1i& labels, int label, const cv::Rect& box, const cv::Mat1f& image,
                  double radius) {
  const double depth = radius / 4;
  const int margin = static_cast<int>(std::ceil(depth)) + 3;
  const cv::Rect near =
      cv::Rect(box.x - margin, box.y - margin, box.width + 2 * margin, box.height + 2 * margin) &
      cv::Rect(0, 0, labels.cols, labels.rows);
  const cv::Mat1i part = labels(near);
  const cv::Mat1f values = image(near);
  cv::Mat1b own(part.size());
  for (int y = 0; y < part.rows; ++y)
    for (int x = 0; x < part.cols; ++x) own(y, x) = part(y, x) == label ? 255 : 0;
  cv::Mat1f inner;
  cv::distanceTransform(own, inner, cv::DIST_L2, cv::DIST_MASK_5);
  cv::bitwise_not(own, own);
  cv::Mat1f outer;
  cv::distanceTransform(own, outer, cv::DIST_L2, cv::DIST_MASK_5);
  double sums[2] = {0, 0};
  int counts[2] = {0, 0};
  for (int y = 0; y < part.rows; ++y) {
    for (int x = 0; x < part.cols; ++x) {
      const bool inside = part(y, x) == label;
      if (!inside && part(y, x) >= 0) continue;
      const float distance = inside ? inner(y, x) : outer(y, x);
      if (std::abs(static_cast<double>(distance) - depth) > 1) continue;
      sums[inside ? 0 : 1] += static_cast<double>(values(y, x));
      ++counts[inside ? 0 : 1];
    }
  }
  if (counts[0] == 0 || counts[1] == 0) return 0;
  return (sums[0] / counts[0] - sums[1] / counts[1]) / (2 * depth);
}

double solidity(const std::vector<Run>& runs) {
  if (runs.empty()) return 0;
  std::vector<cv::Point> corners;
  double pixels = 0;
  for (const Run& run : runs) {
    pixels += run.x1 - run.x0;
    corners.emplace_back(run.x0, run.y);
    corners.emplace_back(run.x1, run.y);
    corners.emplace_back(run.x0, run.y + 1);
    corners.emplace_back(run.x1, run.y + 1);
  }
  std::vector<cv::Point> hull;
  cv::convexHull(corners, hull);
  return pixels / std::max(cv::contourArea(hull), 1.0);
}

}  // namespace wavefount::nuclei
