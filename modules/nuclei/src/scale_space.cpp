#include "wavefount/nuclei/scale_space.h"

#include <algorithm>
#include <cmath>
#include <opencv2/imgproc.hpp>

namespace wavefount::nuclei {
namespace {

cv::Mat1f every_second(const cv::Mat1f& image) {
  cv::Mat1f half((image.rows + 1) / 2, (image.cols + 1) / 2);
  for (int y = 0; y < half.rows; ++y) {
    const float* from = image[2 * y];
    float* to = half[y];
    for (int x = 0; x < half.cols; ++x) to[x] = from[2 * x];
  }
  return half;
}

/// Index mirrored at the borders without repeating them.
int mirrored(int index, int size) {
  if (size == 1) return 0;
  if (index < 0) return -index;
  return index < size ? index : 2 * size - 2 - index;
}

float minus_sigma_squared(const BlobScale& scale) {
  const double sigma = scale.sigma_px / scale.step;
  return static_cast<float>(-sigma * sigma);
}

}  // namespace

ScaleSpace::ScaleSpace(const cv::Mat1f& image, const std::vector<BlobScale>& scales)
    : scales_(scales) {
  cv::Mat1f from = image;
  int step = 1;
  for (const BlobScale& scale : scales) {
    if (scale.step > step) from = every_second(from);
    step = scale.step;
    const cv::Mat taps(1, static_cast<int>(scale.kernel.size()), CV_32F,
                       const_cast<float*>(scale.kernel.data()));
    cv::Mat1f level;
    cv::sepFilter2D(from, level, CV_32F, taps, taps, cv::Point(-1, -1), 0, cv::BORDER_REFLECT_101);
    levels_.push_back(level);
    from = level;
  }
}

float ScaleSpace::response(int scale, int x, int y) const {
  const cv::Mat1f& level = smoothed(scale);
  const float* row = level[y];
  const float sum = row[mirrored(x - 1, level.cols)] + row[mirrored(x + 1, level.cols)] +
                    level(mirrored(y - 1, level.rows), x) + level(mirrored(y + 1, level.rows), x);
  return minus_sigma_squared(scales_[static_cast<std::size_t>(scale)]) * (sum - 4 * row[x]);
}

void ScaleSpace::response_row(int scale, int y, float* row) const {
  const cv::Mat1f& level = smoothed(scale);
  const float* above = level[mirrored(y - 1, level.rows)];
  const float* here = level[y];
  const float* below = level[mirrored(y + 1, level.rows)];
  const float weight = minus_sigma_squared(scales_[static_cast<std::size_t>(scale)]);
  for (int x = 1; x + 1 < level.cols; ++x)
    row[x] = weight * (here[x - 1] + here[x + 1] + above[x] + below[x] - 4 * here[x]);
  row[0] = response(scale, 0, y);
  row[level.cols - 1] = response(scale, level.cols - 1, y);
}

double ScaleSpace::roundness(int scale, int x, int y) const {
  const cv::Mat1f& level = smoothed(scale);
  const auto at = [&](int dx, int dy) {
    return static_cast<double>(level(mirrored(y + dy, level.rows), mirrored(x + dx, level.cols)));
  };
  const double across = at(-1, 0) + at(1, 0) - 2 * at(0, 0);
  const double down = at(0, -1) + at(0, 1) - 2 * at(0, 0);
  const double slant = (at(1, 1) + at(-1, -1) - at(1, -1) - at(-1, 1)) / 4;
  const double mean = (across + down) / 2;
  const double spread = std::hypot((across - down) / 2, slant);
  if (mean + spread >= 0) return 0;
  return (mean + spread) / (mean - spread);
}

}  // namespace wavefount::nuclei
