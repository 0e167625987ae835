#pragma once

#include <opencv2/core/mat.hpp>
#include <vector>

#include "wavefount/nuclei/blob_scales.h"

namespace wavefount::nuclei {

/// An image smoothed to each of the planned scales, on their grids.
class ScaleSpace {
 public:
  ScaleSpace(const cv::Mat1f& image, const std::vector<BlobScale>& scales);

  const std::vector<BlobScale>& scales() const { return scales_; }
  const cv::Mat1f& smoothed(int scale) const { return levels_[static_cast<std::size_t>(scale)]; }
  /// −σ² ∇²L at one pixel of the scale's grid; the image is mirrored at its borders.
  float response(int scale, int x, int y) const;
  /// One row of it, as many values as the scale's grid is wide.
  void response_row(int scale, int y, float* row) const;
  /// Smaller over larger eigenvalue of the Hessian where both bend down, 0 elsewhere.
  double roundness(int scale, int x, int y) const;

 private:
  const std::vector<BlobScale>& scales_;
  std::vector<cv::Mat1f> levels_;
};

}  // namespace wavefount::nuclei
