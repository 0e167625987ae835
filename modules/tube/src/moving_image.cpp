#include <algorithm>
#include <cmath>
#include <opencv2/imgproc.hpp>
#include <vector>

#include "wavefount/core/robust.h"
#include "wavefount/tube/binning.h"
#include "wavefount/tube/shift.h"

namespace wavefount::tube {
namespace {

/// Longest side of a thumbnail: its transform stays below half a millisecond.
constexpr double longest_thumb_px = 256;
/// Share of each side over which the window falls to zero.
constexpr double taper_share = 0.15;
/// A 3 × 3 binomial mean leaves this share of white noise.
constexpr double smoothed_noise_share = 0.375;

/// Noise of one pixel from the finest diagonal detail on a sample of the image.
double fine_noise(const cv::Mat& image) {
  std::vector<double> details;
  for (int y = 0; y + 1 < image.rows; y += 4) {
    const float* row = image.ptr<float>(y);
    const float* next = image.ptr<float>(y + 1);
    for (int x = 0; x + 1 < image.cols; x += 4)
      details.push_back(0.5 * (row[x] - row[x + 1] - next[x] + next[x + 1]));
  }
  return robust_sd(details);
}

std::vector<float> taper(int length) {
  std::vector<float> window(static_cast<std::size_t>(length), 1.0F);
  const int edge = std::max(1, static_cast<int>(std::lround(taper_share * length)));
  for (int i = 0; i < std::min(edge, length); ++i) {
    const double value = 0.5 - 0.5 * std::cos(CV_PI * (i + 0.5) / edge);
    window[static_cast<std::size_t>(i)] = static_cast<float>(value);
    window[static_cast<std::size_t>(length - 1 - i)] = static_cast<float>(value);
  }
  return window;
}

/// High-passed, so that uneven light does not speak, and limited, so that no single bright thing
/// outshouts the walls.
void flatten(cv::Mat& thumb) {
  cv::Mat slow;
  const int half = std::max(2, std::max(thumb.cols, thumb.rows) / 20);
  cv::blur(thumb, slow, cv::Size(2 * half + 1, 2 * half + 1), cv::Point(-1, -1),
           cv::BORDER_REPLICATE);
  thumb -= slow;
  std::vector<double> sample;
  for (int y = 0; y < thumb.rows; y += 2)
    for (int x = 0; x < thumb.cols; x += 2)
      sample.push_back(std::abs(static_cast<double>(thumb.at<float>(y, x))));
  const double limit = std::max(quantile(std::move(sample), 0.95), 1e-12);
  cv::max(cv::min(thumb, limit), -limit, thumb);
}

}  // namespace

MovingImage::MovingImage(const Image& reduced) {
  const cv::Mat image = as_matrix(reduced);
  cv::GaussianBlur(image, smoothed_, cv::Size(3, 3), 0.85, 0.85, cv::BORDER_REPLICATE);
  noise_ = fine_noise(image) * smoothed_noise_share;
  thumb_factor_ = std::max(1.0, std::ceil(std::max(image.cols, image.rows) / longest_thumb_px));
}

const cv::Mat& MovingImage::spectrum() const {
  if (!spectrum_.empty()) return spectrum_;
  cv::Mat thumb;
  const int factor = static_cast<int>(thumb_factor_);
  const cv::Rect whole(0, 0, std::max(1, smoothed_.cols / factor) * factor,
                       std::max(1, smoothed_.rows / factor) * factor);
  const cv::Mat part = smoothed_(whole & cv::Rect(0, 0, smoothed_.cols, smoothed_.rows));
  cv::resize(part, thumb, cv::Size(whole.width / factor, whole.height / factor), 0, 0,
             cv::INTER_AREA);
  flatten(thumb);
  const auto across = taper(thumb.cols);
  const auto down = taper(thumb.rows);
  cv::Mat padded = cv::Mat::zeros(cv::getOptimalDFTSize(thumb.rows),
                                  cv::getOptimalDFTSize(thumb.cols), CV_32FC1);
  for (int y = 0; y < thumb.rows; ++y)
    for (int x = 0; x < thumb.cols; ++x)
      padded.at<float>(y, x) = thumb.at<float>(y, x) * down[static_cast<std::size_t>(y)] *
                               across[static_cast<std::size_t>(x)];
  cv::dft(padded, spectrum_, cv::DFT_COMPLEX_OUTPUT, thumb.rows);
  return spectrum_;
}

OpenedThumb opened_thumb(const Image& reduced, double blob_px) {
  OpenedThumb thumb;
  const int longest = std::max(image_width(reduced), image_height(reduced));
  const int shortest = std::min(image_width(reduced), image_height(reduced));
  thumb.factor = std::clamp(static_cast<int>(std::ceil(longest / longest_thumb_px)), 1,
                            std::max(1, shortest / 8));
  thumb.image = bin_mean(reduced, thumb.factor);
  cv::Mat pixels = as_matrix(*thumb.image);
  const int side = 2 * static_cast<int>(std::lround(blob_px / thumb.factor / 2)) + 1;
  if (side < 3) return thumb;
  cv::morphologyEx(pixels, pixels, cv::MORPH_OPEN,
                   cv::getStructuringElement(cv::MORPH_ELLIPSE, cv::Size(side, side)),
                   cv::Point(-1, -1), 1, cv::BORDER_REPLICATE);
  return thumb;
}

}  // namespace wavefount::tube
