#pragma once

#include <array>
#include <opencv2/core/mat.hpp>
#include <vector>

namespace wavefount::tube {

/// A brightness that changes slowly over the image: a quadratic in both coordinates.
struct LevelField {
  std::array<double, 6> terms{};
  double half_width = 1, half_height = 1;

  double at(double x, double y) const;
};

/// What is tube and what is outside, roughly, in reduced pixels.
struct Segmentation {
  cv::Mat smoothed;  ///< image with thin bright lines and small bright debris taken off
  LevelField inside, outside;
  std::vector<cv::Mat> regions;  ///< CV_8U masks (0 / 255), holes filled, largest first
  double contrast = 0;           ///< median of inside less outside, counts
  double noise = 0;              ///< of a smoothed pixel, counts
};

/// Two regions, each of slowly changing brightness (Chan & Vese 2001 with quadratic levels instead
/// of constants), from several starts; the one that explains the image best. Regions whose border
/// is no edge (vignetting makes such) are dropped. `thin_px`: bright lines thinner than this are
/// wall glow, not tube. `least_area_px`: smaller regions are debris.
Segmentation segment(const cv::Mat& image, double thin_px, double least_area_px);

}  // namespace wavefount::tube
