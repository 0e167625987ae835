#include "wavefount/tube/segment.h"

#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <limits>
#include <opencv2/imgproc.hpp>

#include "wavefount/core/robust.h"

namespace wavefount::tube {
namespace {

constexpr int rounds = 12;
/// Pixels sampled for a level field: plenty for six numbers.
constexpr std::size_t sample_count = 6000;
/// A region below this share of the image gets a constant level: its extent is too short for
/// slopes.
constexpr double sloped_share = 0.04;
/// A border is an edge when this share of the contrast lies within a short step across it.
constexpr double edge_share = 0.45;
/// Inside over outside in units of the noise of a smoothed pixel.
constexpr double least_contrast_to_noise = 2.5;
/// A region smaller than this share of the largest is not a tube beside it.
constexpr double least_relative_area = 0.12;

using Terms = Eigen::Matrix<double, 6, 1>;

Terms terms_at(double u, double v) {
  Terms terms;
  terms << 1, u, v, u * u, u * v, v * v;
  return terms;
}

struct Sample {
  double u, v, value;
};

std::vector<Sample> sampled(const cv::Mat& image, const cv::Mat& mask, bool inside) {
  const std::size_t total = image.total();
  const int stride =
      std::max(1, static_cast<int>(std::sqrt(static_cast<double>(total) / (4.0 * sample_count))));
  std::vector<Sample> samples;
  for (int y = stride / 2; y < image.rows; y += stride)
    for (int x = stride / 2; x < image.cols; x += stride)
      if ((mask.at<unsigned char>(y, x) > 0) == inside)
        samples.push_back({2.0 * x / image.cols - 1, 2.0 * y / image.rows - 1,
                           static_cast<double>(image.at<float>(y, x))});
  return samples;
}

LevelField fit_level(const cv::Mat& image, const cv::Mat& mask, bool inside) {
  const auto samples = sampled(image, mask, inside);
  LevelField field;
  field.half_width = image.cols / 2.0;
  field.half_height = image.rows / 2.0;
  if (samples.empty()) return field;
  std::vector<double> values;
  for (const auto& one : samples) values.push_back(one.value);
  Terms terms = Terms::Zero();
  terms[0] = median(values);
  const double share = static_cast<double>(cv::countNonZero(mask)) /
                       static_cast<double>(std::max<std::size_t>(1, mask.total()));
  const bool sloped = (inside ? share : 1 - share) > sloped_share && samples.size() > 50;
  for (int round = 0; sloped && round < 6; ++round) {
    std::vector<double> rests;
    for (const auto& one : samples) rests.push_back(one.value - terms.dot(terms_at(one.u, one.v)));
    std::vector<double> sizes;
    for (const double rest : rests) sizes.push_back(std::abs(rest));
    const double scale = std::max(1.4826 * median(std::move(sizes)), 1e-12);
    Eigen::Matrix<double, 6, 6> normal = Eigen::Matrix<double, 6, 6>::Zero();
    Terms right = Terms::Zero();
    for (std::size_t i = 0; i < samples.size(); ++i) {
      const double u = rests[i] / (4.685 * scale);
      if (std::abs(u) >= 1) continue;
      const double weight = (1 - u * u) * (1 - u * u);
      const auto at = terms_at(samples[i].u, samples[i].v);
      normal += weight * at * at.transpose();
      right += weight * samples[i].value * at;
    }
    // Slopes and bends that the region's shape leaves undetermined stay near zero.
    for (int k = 1; k < 6; ++k) normal(k, k) += 1e-3 * normal(0, 0);
    terms = normal.ldlt().solve(right);
  }
  for (std::size_t k = 0; k < 6; ++k) field.terms[k] = terms[static_cast<Eigen::Index>(k)];
  return field;
}

struct Split {
  cv::Mat mask;
  LevelField inside, outside;
  double misfit = std::numeric_limits<double>::infinity();
};

double misfit_of(const cv::Mat& image, const Split& split) {
  double sum = 0;
  long long count = 0;
  for (int y = 1; y < image.rows; y += 3) {
    for (int x = 1; x < image.cols; x += 3) {
      const auto& field = split.mask.at<unsigned char>(y, x) ? split.inside : split.outside;
      sum += std::abs(image.at<float>(y, x) - field.at(x, y));
      ++count;
    }
  }
  return count > 0 ? sum / static_cast<double>(count) : 0;
}

/// Levels and mask in turn until they agree.
Split settle(const cv::Mat& image, double threshold, double least_gap) {
  Split split;
  split.mask = image > threshold;
  for (int round = 0; round < rounds; ++round) {
    const int inside_count = cv::countNonZero(split.mask);
    if (inside_count < 30 || static_cast<std::size_t>(inside_count) + 30 > image.total()) break;
    split.inside = fit_level(image, split.mask, true);
    split.outside = fit_level(image, split.mask, false);
    cv::Mat next(image.size(), CV_8U);
    for (int y = 0; y < image.rows; ++y) {
      const float* row = image.ptr<float>(y);
      auto* to = next.ptr<unsigned char>(y);
      for (int x = 0; x < image.cols; ++x) {
        const double low = split.outside.at(x, y);
        const double high = std::max(split.inside.at(x, y), low + least_gap);
        to[x] = row[x] > (low + high) / 2 ? 255 : 0;
      }
    }
    const bool same = cv::countNonZero(next != split.mask) == 0;
    split.mask = next;
    if (same) break;
  }
  split.misfit = misfit_of(image, split);
  return split;
}

/// Otsu's threshold (1979) on values between the given quantiles.
double otsu(const std::vector<double>& sorted) {
  const std::size_t count = sorted.size();
  double total = 0;
  for (const double value : sorted) total += value;
  double below = 0;
  double best = -1;
  double threshold = sorted[count / 2];
  for (std::size_t i = 0; i + 1 < count; ++i) {
    below += sorted[i];
    const double n = static_cast<double>(i + 1);
    const double rest = static_cast<double>(count) - n;
    const double gap = below / n - (total - below) / rest;
    if (n * rest * gap * gap <= best) continue;
    best = n * rest * gap * gap;
    threshold = (sorted[i] + sorted[i + 1]) / 2;
  }
  return threshold;
}

/// Share of the contrast that lies within `reach` pixels across the region's border, median over
/// the border inside the image; 0 when all of it is the image's own border.
double border_sharpness(const cv::Mat& region, const Segmentation& segmentation, double reach) {
  std::vector<std::vector<cv::Point>> contours;
  cv::findContours(region.clone(), contours, cv::RETR_EXTERNAL, cv::CHAIN_APPROX_NONE);
  cv::Mat soft;
  region.convertTo(soft, CV_32F, 1 / 255.0);
  cv::GaussianBlur(soft, soft, cv::Size(), 2);
  const cv::Mat& image = segmentation.smoothed;
  std::vector<double> shares;
  for (const auto& contour : contours) {
    for (const auto& at : contour) {
      if (at.x < 2 || at.y < 2 || at.x + 2 >= image.cols || at.y + 2 >= image.rows) continue;
      double nx = soft.at<float>(at.y, at.x + 1) - soft.at<float>(at.y, at.x - 1);
      double ny = soft.at<float>(at.y + 1, at.x) - soft.at<float>(at.y - 1, at.x);
      const double length = std::hypot(nx, ny);
      if (length <= 0) continue;
      nx *= reach / length;
      ny *= reach / length;
      const auto value = [&](double x, double y) -> double {
        return image.at<float>(std::clamp(static_cast<int>(std::lround(y)), 0, image.rows - 1),
                               std::clamp(static_cast<int>(std::lround(x)), 0, image.cols - 1));
      };
      const double gap = segmentation.inside.at(at.x, at.y) - segmentation.outside.at(at.x, at.y);
      if (gap <= 0) continue;
      shares.push_back((value(at.x + nx, at.y + ny) - value(at.x - nx, at.y - ny)) / gap);
    }
  }
  return shares.size() < 10 ? 0 : median(std::move(shares));
}

cv::Mat filled(const cv::Mat& region) {
  std::vector<std::vector<cv::Point>> contours;
  cv::findContours(region.clone(), contours, cv::RETR_EXTERNAL, cv::CHAIN_APPROX_NONE);
  cv::Mat full = cv::Mat::zeros(region.size(), CV_8U);
  cv::drawContours(full, contours, -1, cv::Scalar(255), cv::FILLED);
  return full;
}

/// Connected parts large enough to be tubes, largest first.
std::vector<cv::Mat> parts(const cv::Mat& mask, double thin_px, double least_area_px) {
  const int side = 2 * std::max(1, static_cast<int>(std::lround(thin_px / 2))) + 1;
  const auto kernel = cv::getStructuringElement(cv::MORPH_ELLIPSE, cv::Size(side, side));
  // The image's border is no wall: what lies outside counts as its nearest neighbour.
  cv::Mat opened;
  cv::copyMakeBorder(mask, opened, side, side, side, side, cv::BORDER_REPLICATE);
  cv::morphologyEx(opened, opened, cv::MORPH_OPEN, kernel);
  opened = opened(cv::Rect(side, side, mask.cols, mask.rows)).clone();
  cv::Mat labels;
  cv::Mat stats;
  cv::Mat centres;
  const int count = cv::connectedComponentsWithStats(opened, labels, stats, centres, 4);
  std::vector<int> order;
  for (int k = 1; k < count; ++k) order.push_back(k);
  const auto area = [&](int k) { return stats.at<int>(k, cv::CC_STAT_AREA); };
  std::sort(order.begin(), order.end(),
            [&](int a, int b) { return area(a) != area(b) ? area(a) > area(b) : a < b; });
  std::vector<cv::Mat> found;
  for (const int k : order) {
    const double least = std::max(least_area_px, least_relative_area * area(order.front()));
    if (area(k) >= least) found.push_back(filled(labels == k));
  }
  return found;
}

cv::Mat without_thin_bright(const cv::Mat& image, double thin_px) {
  cv::Mat smoothed;
  cv::GaussianBlur(image, smoothed, cv::Size(), 1.2, 1.2, cv::BORDER_REPLICATE);
  const int side = 2 * std::max(1, static_cast<int>(std::lround(thin_px / 2))) + 1;
  const auto kernel = cv::getStructuringElement(cv::MORPH_ELLIPSE, cv::Size(side, side));
  cv::morphologyEx(smoothed, smoothed, cv::MORPH_OPEN, kernel, cv::Point(-1, -1), 1,
                   cv::BORDER_REPLICATE);
  return smoothed;
}

double detail_noise(const cv::Mat& image) {
  std::vector<double> details;
  for (int y = 2; y + 2 < image.rows; y += 5)
    for (int x = 2; x + 2 < image.cols; x += 5)
      details.push_back(0.5 * (image.at<float>(y, x) - image.at<float>(y, x + 2) -
                               image.at<float>(y + 2, x) + image.at<float>(y + 2, x + 2)));
  return robust_sd(details);
}

}  // namespace

double LevelField::at(double x, double y) const {
  const double u = x / half_width - 1;
  const double v = y / half_height - 1;
  return terms[0] + terms[1] * u + terms[2] * v + terms[3] * u * u + terms[4] * u * v +
         terms[5] * v * v;
}

Segmentation segment(const cv::Mat& image, double thin_px, double least_area_px) {
  Segmentation result;
  result.smoothed = without_thin_bright(image, thin_px);
  result.noise = detail_noise(result.smoothed);
  std::vector<double> sorted;
  for (int y = 0; y < image.rows; y += 2)
    for (int x = 0; x < image.cols; x += 2) sorted.push_back(result.smoothed.at<float>(y, x));
  std::sort(sorted.begin(), sorted.end());
  const auto at = [&](double share) {
    return sorted[static_cast<std::size_t>(share * static_cast<double>(sorted.size() - 1))];
  };
  const double dark = at(0.005);
  const double middle = at(0.5);
  const double bright = at(0.97);
  const double least_gap = std::max(0.1 * (bright - dark), 2 * result.noise);
  std::vector<double> clipped;
  for (const double value : sorted) clipped.push_back(std::clamp(value, dark, bright));
  Split best;
  for (const double threshold : {otsu(clipped), (dark + middle) / 2, (middle + bright) / 2}) {
    auto split = settle(result.smoothed, threshold, least_gap);
    if (split.misfit < best.misfit) best = split;
  }
  if (best.mask.empty()) return result;
  result.inside = best.inside;
  result.outside = best.outside;
  std::vector<double> gaps;
  for (int y = 0; y < image.rows; y += 5)
    for (int x = 0; x < image.cols; x += 5)
      if (best.mask.at<unsigned char>(y, x))
        gaps.push_back(best.inside.at(x, y) - best.outside.at(x, y));
  result.contrast = median(std::move(gaps));
  if (result.contrast < least_contrast_to_noise * result.noise) return result;
  for (const auto& region : parts(best.mask, thin_px, least_area_px))
    if (border_sharpness(region, result, std::max(3.0, thin_px / 2)) >= edge_share)
      result.regions.push_back(region);
  return result;
}

}  // namespace wavefount::tube
