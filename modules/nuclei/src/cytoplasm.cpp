#include "wavefount/nuclei/cytoplasm.h"

#include <algorithm>
#include <cmath>
#include <opencv2/imgproc.hpp>
#include <vector>

#include "wavefount/core/robust.h"

namespace wavefount::nuclei {
namespace {

/// A block's level is settled by this many pixels; more cost time only.
constexpr int samples_a_block = 600;
/// With fewer pixels of tube a block is filled from its neighbours.
constexpr std::size_t fewest_samples = 24;
/// A quartile of normal noise lies this many standard deviations below the mean.
constexpr double quartile_depth = 0.6745;

struct Block {
  int x0, x1, y0, y1, stride;
};

Block block_at(const cv::Mat1f& level, int bx, int by, int width, int height) {
  Block block{};
  block.x0 = bx * width / level.cols;
  block.x1 = (bx + 1) * width / level.cols;
  block.y0 = by * height / level.rows;
  block.y1 = (by + 1) * height / level.rows;
  const double area = static_cast<double>(block.x1 - block.x0) * (block.y1 - block.y0);
  block.stride = std::max(1, static_cast<int>(std::sqrt(area / samples_a_block)));
  return block;
}

template <class Visit>
void for_samples(const Block& block, const cv::Mat1b& tubes, Visit visit) {
  for (int y = block.y0; y < block.y1; y += block.stride) {
    const unsigned char* inside = tubes[y];
    for (int x = block.x0; x < block.x1; x += block.stride)
      if (inside[x] != 0) visit(x, y);
  }
}

/// Fills blocks of no weight from their neighbours, ring by ring.
void fill_gaps(cv::Mat1f& level, cv::Mat1f& known) {
  const double total = cv::sum(known)[0];
  if (total <= 0) return;
  while (cv::countNonZero(known) < static_cast<int>(known.total())) {
    cv::Mat1f weighted;
    cv::multiply(level, known, weighted);
    cv::Mat1f spread;
    cv::Mat1f weight;
    cv::GaussianBlur(weighted, spread, cv::Size(3, 3), 0.8, 0.8, cv::BORDER_CONSTANT);
    cv::GaussianBlur(known, weight, cv::Size(3, 3), 0.8, 0.8, cv::BORDER_CONSTANT);
    for (int y = 0; y < level.rows; ++y)
      for (int x = 0; x < level.cols; ++x)
        if (known(y, x) == 0.0F && weight(y, x) > 0.0F) level(y, x) = spread(y, x) / weight(y, x);
    for (int y = 0; y < level.rows; ++y)
      for (int x = 0; x < level.cols; ++x)
        if (weight(y, x) > 0.0F) known(y, x) = 1.0F;
  }
}

/// Position between two block centres: the lower one and the share of the upper.
struct Between {
  int low = 0;
  float share = 0;
};

Between between(double pixel, double block_size, int blocks) {
  const double at = std::clamp((pixel + 0.5) / block_size - 0.5, 0.0, blocks - 1.0);
  const int low = std::min(static_cast<int>(at), std::max(blocks - 2, 0));
  return {low, static_cast<float>(at - low)};
}

}  // namespace

Cytoplasm::Cytoplasm(const cv::Mat1f& frame, const cv::Mat1b& tubes, const CameraModel& camera,
                     int factor, double block_px)
    : camera_(camera),
      pixels_a_mean_(static_cast<double>(factor) * factor),
      width_(frame.cols),
      height_(frame.rows) {
  const auto blocks = [&](int pixels) {
    return std::max(1, static_cast<int>(std::lround(pixels / std::max(block_px, 4.0))));
  };
  level_ = cv::Mat1f(blocks(height_), blocks(width_), 0.0F);
  block_width_ = static_cast<double>(width_) / level_.cols;
  block_height_ = static_cast<double>(height_) / level_.rows;
  measure(frame, tubes);
  refine(frame, tubes);
}

void Cytoplasm::measure(const cv::Mat1f& frame, const cv::Mat1b& tubes) {
  cv::Mat1f known(level_.size(), 0.0F);
  std::vector<double> values;
  std::vector<double> noises;
  for (int by = 0; by < level_.rows; ++by) {
    for (int bx = 0; bx < level_.cols; ++bx) {
      values.clear();
      for_samples(block_at(level_, bx, by, width_, height_), tubes,
                  [&](int x, int y) { values.push_back(frame(y, x)); });
      if (values.size() < fewest_samples) continue;
      const double quartile = quantile(values, 0.25);
      const double noise = noise_of(quartile);
      level_(by, bx) = static_cast<float>(quartile + quartile_depth * noise);
      known(by, bx) = 1.0F;
      noises.push_back(noise);
    }
  }
  if (!noises.empty()) lowest_noise_ = *std::min_element(noises.begin(), noises.end());
  typical_noise_ = median(std::move(noises));
  fill_gaps(level_, known);
}

/// The mean of what lies within three standard deviations of the first level, which a gradient
/// inside a block biased downwards.
void Cytoplasm::refine(const cv::Mat1f& frame, const cv::Mat1b& tubes) {
  cv::Mat1f correction(level_.size(), 0.0F);
  cv::Mat1f known(level_.size(), 0.0F);
  for (int by = 0; by < level_.rows; ++by) {
    for (int bx = 0; bx < level_.cols; ++bx) {
      double sum = 0;
      std::size_t count = 0;
      const double limit = 3 * noise_of(level_(by, bx));
      for_samples(block_at(level_, bx, by, width_, height_), tubes, [&](int x, int y) {
        const double over = static_cast<double>(frame(y, x)) - at(x, y);
        if (std::abs(over) > limit) return;
        sum += over;
        ++count;
      });
      if (count < fewest_samples) continue;
      correction(by, bx) = static_cast<float>(sum / static_cast<double>(count));
      known(by, bx) = 1.0F;
    }
  }
  fill_gaps(correction, known);
  level_ += correction;
}

float Cytoplasm::at(double x, double y) const {
  const Between across = between(x, block_width_, level_.cols);
  const Between down = between(y, block_height_, level_.rows);
  const int right = std::min(across.low + 1, level_.cols - 1);
  const int below = std::min(down.low + 1, level_.rows - 1);
  const auto mix = [&](int row) {
    return level_(row, across.low) + across.share * (level_(row, right) - level_(row, across.low));
  };
  const float upper = mix(down.low);
  return upper + down.share * (mix(below) - upper);
}

double Cytoplasm::noise_at(double x, double y) const {
  return noise_of(at(x, y));
}

/// Never below what single-precision counts can hold.
double Cytoplasm::noise_of(double counts) const {
  const double rounding = 1e-6 * std::abs(counts);
  return std::max(std::sqrt(camera_.variance(counts) / pixels_a_mean_), rounding);
}

/// The level along one row: the block rows are mixed once, then walked over.
void Cytoplasm::fill_row(int y, std::vector<float>& mixed, float* row) const {
  const Between down = between(y, block_height_, level_.rows);
  const float* upper = level_[down.low];
  const float* lower = level_[std::min(down.low + 1, level_.rows - 1)];
  mixed.resize(static_cast<std::size_t>(level_.cols) + 1);
  for (int i = 0; i < level_.cols; ++i)
    mixed[static_cast<std::size_t>(i)] = upper[i] + down.share * (lower[i] - upper[i]);
  mixed.back() = mixed[mixed.size() - 2];
  const auto per_pixel = static_cast<float>(1 / block_width_);
  const auto first = static_cast<float>(0.5 / block_width_ - 0.5);
  const auto last = static_cast<float>(level_.cols - 1);
  for (int x = 0; x < width_; ++x) {
    const float at = std::min(std::max(first + static_cast<float>(x) * per_pixel, 0.0F), last);
    const auto low = static_cast<std::size_t>(at);
    const float share = at - static_cast<float>(low);
    row[x] = mixed[low] + share * (mixed[low + 1] - mixed[low]);
  }
}

cv::Mat1f Cytoplasm::excess(const cv::Mat1f& frame, const cv::Mat1b& tubes) const {
  cv::Mat1f over(frame.size());
  std::vector<float> level(static_cast<std::size_t>(width_));
  std::vector<float> mixed;
  for (int y = 0; y < height_; ++y) {
    fill_row(y, mixed, level.data());
    const auto lowest = static_cast<float>(-3 * noise_at(width_ / 2.0, y));
    const float* from = frame[y];
    const unsigned char* inside = tubes[y];
    float* to = over[y];
    for (int x = 0; x < width_; ++x) {
      const float above = std::max(from[x] - level[static_cast<std::size_t>(x)], lowest);
      to[x] = inside[x] != 0 ? above : 0.0F;
    }
  }
  return over;
}

}  // namespace wavefount::nuclei
