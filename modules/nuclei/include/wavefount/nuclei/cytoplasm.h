#pragma once

#include <opencv2/core/mat.hpp>
#include <vector>

#include "wavefount/core/prescan.h"

namespace wavefount::nuclei {

/// The level of the cytoplasm without nuclei over a reduced frame, dark offset included, also
/// continued to outside of the tubes.
///
/// Robust level of blocks (normalised convolution fills those without tube: Knutsson and Westin
/// 1993), bilinear in between.
class Cytoplasm {
 public:
  /// `frame` and `tubes` of one size; `tubes` is 0 outside. `block_px`: reduced pixels a side, wide
  /// enough that nuclei never fill three quarters of a block. `factor`: full-size pixels a side of
  /// a reduced one, for the noise.
  Cytoplasm(const cv::Mat1f& frame, const cv::Mat1b& tubes, const CameraModel& camera, int factor,
            double block_px);

  /// Level in counts at a reduced pixel.
  float at(double x, double y) const;
  /// Standard deviation of one reduced pixel of cytoplasm there, counts.
  double noise_at(double x, double y) const;
  /// Lowest and median `noise_at` over the blocks that hold tube; 0 when none does.
  double lowest_noise() const { return lowest_noise_; }
  double typical_noise() const { return typical_noise_; }
  /// What stands above the cytoplasm, counts, same size as the frame: 0 outside of the tubes, so
  /// that neither walls nor what lies outside respond, and nowhere below −3 standard deviations,
  /// so that a dark wall, hole or bubble does not make its bright side stand out.
  cv::Mat1f excess(const cv::Mat1f& frame, const cv::Mat1b& tubes) const;

 private:
  double noise_of(double counts) const;
  void measure(const cv::Mat1f& frame, const cv::Mat1b& tubes);
  void refine(const cv::Mat1f& frame, const cv::Mat1b& tubes);
  void fill_row(int y, std::vector<float>& mixed, float* row) const;

  CameraModel camera_;
  double pixels_a_mean_ = 1;
  int width_ = 0, height_ = 0;
  double block_width_ = 1, block_height_ = 1;
  cv::Mat1f level_;  ///< one a block
  double lowest_noise_ = 0, typical_noise_ = 0;
};

}  // namespace wavefount::nuclei
