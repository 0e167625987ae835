#include <algorithm>
#include <cmath>
#include <opencv2/imgproc.hpp>

#include "wavefount/core/robust.h"
#include "wavefount/tube/axis.h"
#include "wavefount/tube/find_tubes.h"
#include "wavefount/tube/polygon_mask.h"

namespace wavefount::tube {
namespace {

/// Half height between cytoplasm and outside, as for walls.
constexpr float bubble_level = 0.5F;

/// Brightness between outside (0) and the tube's own cytoplasm (1).
cv::Mat relative(const cv::Mat& image, const cv::Mat& inside, const cv::Mat& outside,
                 const cv::Mat& mask) {
  cv::Mat share;
  cv::GaussianBlur(image, share, cv::Size(), 1, 1, cv::BORDER_REPLICATE);
  std::vector<double> values;
  for (int y = 0; y < image.rows; ++y) {
    for (int x = 0; x < image.cols; ++x) {
      const float low = outside.at<float>(y, x);
      const float gap = inside.at<float>(y, x) - low;
      auto& one = share.at<float>(y, x);
      one = gap > 0 ? (one - low) / gap : 1.0F;
      if (mask.at<unsigned char>(y, x) && (x + y) % 3 == 0) values.push_back(one);
    }
  }
  const double usual = median(std::move(values));
  if (usual > 0) share *= 1 / usual;
  return share;
}

Polygon subpixel_contour(const std::vector<cv::Point>& contour, const cv::Mat& share) {
  // Contour pixels lie inside the bubble; the edge is where the level is crossed outwards of them.
  cv::Point2d centre(0, 0);
  for (const auto& one : contour) centre += cv::Point2d(one);
  centre *= 1.0 / static_cast<double>(contour.size());
  Polygon polygon;
  for (const auto& one : contour) {
    const cv::Point2d away = cv::Point2d(one) - centre;
    const double length = std::hypot(away.x, away.y);
    if (length <= 0) continue;
    const int x =
        std::clamp(static_cast<int>(std::lround(one.x + away.x / length)), 0, share.cols - 1);
    const int y =
        std::clamp(static_cast<int>(std::lround(one.y + away.y / length)), 0, share.rows - 1);
    const float here = share.at<float>(one);
    const float next = share.at<float>(y, x);
    const double part =
        next > here ? std::clamp((bubble_level - here) / (next - here), 0.F, 1.F) : 0.5;
    polygon.push_back({one.x + part * away.x / length, one.y + part * away.y / length});
  }
  return simplified(polygon, 0.2);
}

}  // namespace

std::vector<Polygon> find_bubbles(const cv::Mat& image, const cv::Mat& inside,
                                  const cv::Mat& outside, const Polygon& outline,
                                  double smallest_px) {
  const auto mask = polygon_mask(outline, image.size());
  const auto share = relative(image, inside, outside, mask);
  cv::Mat core;
  // Walls and ends are dim by themselves within the blur.
  cv::erode(mask, core, cv::getStructuringElement(cv::MORPH_ELLIPSE, cv::Size(5, 5)),
            cv::Point(-1, -1), 1, cv::BORDER_CONSTANT, cv::Scalar(255));
  const cv::Mat dark = (share < bubble_level) & (core > 0);
  cv::Mat opened;
  const int side = std::max(3, static_cast<int>(smallest_px / 2) | 1);
  cv::morphologyEx(dark, opened, cv::MORPH_OPEN,
                   cv::getStructuringElement(cv::MORPH_ELLIPSE, cv::Size(side, side)));
  std::vector<std::vector<cv::Point>> contours;
  cv::findContours(opened, contours, cv::RETR_EXTERNAL, cv::CHAIN_APPROX_NONE);
  std::vector<Polygon> bubbles;
  for (const auto& contour : contours) {
    if (cv::contourArea(contour) < CV_PI / 4 * smallest_px * smallest_px) continue;
    bubbles.push_back(subpixel_contour(contour, share));
  }
  return bubbles;
}

}  // namespace wavefount::tube
