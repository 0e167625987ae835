#include "wavefount/tube/keyframes.h"

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <limits>
#include <opencv2/imgproc.hpp>
#include <utility>

#include "row_sort.h"
#include "wavefount/tube/shift.h"

namespace wavefount::tube {
namespace {

/// A chained shift is replaced by the direct one when that is confirmed at least this well.
constexpr double trusted_agreement = 0.6;
/// Nuclei form, move and vanish between keyframes: they tell of the stage only when this share of
/// their edges lies upon others.
constexpr double nuclei_agreement = 0.65;
/// Once with the shifts of the chain, twice with those against the median image.
constexpr int median_rounds = 2;

/// The image moved back by its shift; outside it NaN.
cv::Mat moved_back(const Image& image, double x, double y) {
  const cv::Mat source = as_matrix(image);
  cv::Mat moved;
  const cv::Mat place = (cv::Mat_<double>(2, 3) << 1, 0, x, 0, 1, y);
  cv::warpAffine(source, moved, place, source.size(), cv::INTER_LINEAR | cv::WARP_INVERSE_MAP,
                 cv::BORDER_REPLICATE);
  const float none = std::numeric_limits<float>::quiet_NaN();
  for (int row = 0; row < moved.rows; ++row) {
    for (int column = 0; column < moved.cols; ++column) {
      const bool seen = column + x > -0.5 && column + x < source.cols - 0.5 && row + y > -0.5 &&
                        row + y < source.rows - 0.5;
      if (!seen) moved.at<float>(row, column) = none;
    }
  }
  return moved;
}

/// The same row of all images, and the same freed of each image's own gain and offset; what is not
/// seen is +infinity. Sorted by column.
class SortedRow {
 public:
  SortedRow(const std::vector<cv::Mat>& images, const AlignedImages& aligned, int y)
      : values_(images.size()), levelled_(images.size()), seen_(images[0].cols, 0) {
    for (std::size_t k = 0; k < images.size(); ++k) take(images[k].ptr<float>(y), aligned, k);
    sort_columns(values_);
    sort_columns(levelled_);
  }

  float value(int x, double share) const { return quantile_of(values_, x, share); }
  float levelled(int x, double share) const { return quantile_of(levelled_, x, share); }

 private:
  void take(const float* row, const AlignedImages& aligned, std::size_t k) {
    const std::size_t width = seen_.size();
    values_[k].resize(width);
    levelled_[k].resize(width);
    const auto offset = static_cast<float>(aligned.offset[k]);
    const auto scale = static_cast<float>(1 / aligned.gain[k]);
    constexpr float none = std::numeric_limits<float>::infinity();
    for (std::size_t x = 0; x < width; ++x) {
      const bool finite = std::isfinite(row[x]);
      values_[k][x] = finite ? row[x] : none;
      levelled_[k][x] = finite ? (row[x] - offset) * scale : none;
      seen_[x] += finite ? 1 : 0;
    }
  }

  float quantile_of(const std::vector<std::vector<float>>& sorted, int x, double share) const {
    const auto column = static_cast<std::size_t>(x);
    const int last = std::max(seen_[column] - 1, 0);
    const double at = share * last;
    const int below = static_cast<int>(at);
    const int above = std::min(below + 1, last);
    const float low = sorted[static_cast<std::size_t>(below)][column];
    const float high = sorted[static_cast<std::size_t>(above)][column];
    return above == below ? low : low + static_cast<float>(at - below) * (high - low);
  }

  std::vector<std::vector<float>> values_, levelled_;
  std::vector<int> seen_;  ///< images in which each column is seen
};

void combine(const std::vector<ImagePointer>& images, AlignedImages& aligned) {
  std::vector<cv::Mat> moved;
  for (std::size_t k = 0; k < images.size(); ++k)
    moved.push_back(moved_back(*images[k], aligned.x[k], aligned.y[k]));
  const int width = image_width(*images[0]);
  const int height = image_height(*images[0]);
  aligned.median = make_image(width, height);
  aligned.low = make_image(width, height);
  aligned.spread = make_image(width, height);
  for (int y = 0; y < height; ++y) {
    const SortedRow row(moved, aligned, y);
    for (int x = 0; x < width; ++x) {
      const auto at = static_cast<std::ptrdiff_t>(y) * width + x;
      aligned.median->GetBufferPointer()[at] = row.value(x, 0.5);
      aligned.low->GetBufferPointer()[at] = row.value(x, 0.2);
      // The range from 10 to 90 % is 2.563 standard deviations of normal data; a nucleus absent a
      // tenth of the time counts as varying.
      aligned.spread->GetBufferPointer()[at] =
          (row.levelled(x, 0.9) - row.levelled(x, 0.1)) / 2.563F;
    }
  }
}

void put(const Shift& shift, std::size_t k, AlignedImages& aligned) {
  aligned.x[k] = shift.x;
  aligned.y[k] = shift.y;
  aligned.agreement[k] = shift.agreement;
}

/// Each against the one before, and, where that holds better, against the first. In a direction in
/// which nothing but nuclei tells, these speak, if nearly all of them agree.
void chain(const std::vector<ImagePointer>& images, double blob_px, AlignedImages& aligned) {
  std::vector<OpenedThumb> thumbs;
  std::vector<MovingImage> moving;
  for (const auto& image : images) {
    thumbs.push_back(opened_thumb(*image, blob_px));
    moving.emplace_back(*thumbs.back().image);
  }
  const ShiftReference first(*thumbs[0].image);
  const double factor = thumbs[0].factor;
  for (std::size_t k = 1; k < images.size(); ++k) {
    const ShiftReference before(*thumbs[k - 1].image);
    auto step = before.find(moving[k], 0, 0, true);
    double nuclei_x = 0;
    double nuclei_y = 0;
    if (step.blind_directions > 0) {
      const ShiftReference nuclei(*images[k - 1], nullptr, nuclei_agreement);
      const auto seen =
          nuclei.find(MovingImage(*images[k]), factor * step.x, factor * step.y, true);
      const double x = seen.x - factor * step.x;
      const double y = seen.y - factor * step.y;
      const bool both = step.blind_directions == 2;
      const double along = x * step.blind_x + y * step.blind_y;
      nuclei_x = both ? x : along * step.blind_x;
      nuclei_y = both ? y : along * step.blind_y;
    }
    step.x += aligned.x[k - 1] / factor + nuclei_x / factor;
    step.y += aligned.y[k - 1] / factor + nuclei_y / factor;
    const auto direct = first.find(moving[k], step.x, step.y, false);
    const auto& better = direct.agreement > trusted_agreement ? direct : step;
    aligned.x[k] = better.x * factor;
    aligned.y[k] = better.y * factor;
  }
}

void take_first_as_origin(AlignedImages& aligned) {
  const double x = aligned.x[0];
  const double y = aligned.y[0];
  for (auto& one : aligned.x) one -= x;
  for (auto& one : aligned.y) one -= y;
}

}  // namespace

AlignedImages combine_at(const std::vector<ImagePointer>& images, std::vector<double> x,
                         std::vector<double> y) {
  AlignedImages aligned;
  aligned.x = std::move(x);
  aligned.y = std::move(y);
  aligned.agreement.assign(images.size(), 1);
  aligned.gain.assign(images.size(), 1);
  aligned.offset.assign(images.size(), 0);
  combine(images, aligned);
  return aligned;
}

AlignedImages align(const std::vector<ImagePointer>& images, double blob_px) {
  AlignedImages aligned;
  aligned.x.assign(images.size(), 0);
  aligned.y.assign(images.size(), 0);
  aligned.agreement.assign(images.size(), 1);
  aligned.gain.assign(images.size(), 1);
  aligned.offset.assign(images.size(), 0);
  std::vector<MovingImage> moving;
  for (const auto& image : images) moving.emplace_back(*image);
  chain(images, blob_px, aligned);
  combine(images, aligned);
  for (int round = 0; round < median_rounds && images.size() > 2; ++round) {
    const ShiftReference middle(*aligned.median, aligned.spread);
    for (std::size_t k = 0; k < images.size(); ++k) {
      const auto shift = middle.find(moving[k], aligned.x[k], aligned.y[k], false);
      put(shift, k, aligned);
      aligned.gain[k] = shift.gain;
      aligned.offset[k] = shift.offset;
    }
    take_first_as_origin(aligned);
    combine(images, aligned);
  }
  return aligned;
}

}  // namespace wavefount::tube
