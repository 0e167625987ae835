#include "wavefount/tube/shift.h"

#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <limits>
#include <opencv2/imgproc.hpp>
#include <optional>

#include "wavefount/core/robust.h"

namespace wavefount::tube {
namespace {

/// Edge pixels compared: a fraction of a millisecond a frame, and far more than the two numbers
/// sought need.
constexpr std::size_t anchor_count = 4000;
/// An edge must stand out of the gradient's noise by this factor to be one.
constexpr double edge_over_noise = 5;
/// Gradient's noise (central difference) over that of the smoothed pixel.
constexpr double gradient_noise_share = 0.6;
/// Brightness at an edge is not trusted beyond a tenth of a pixel of it and 4 % of the contrast:
/// focus, bleaching and light vary.
constexpr double edge_tolerance_px = 0.1;
constexpr double contrast_tolerance = 0.04;
/// Tukey's biweight: 95 % efficient on normal data.
constexpr double tukey_cut = 4.685;
/// Residuals up to this many of their expected deviations count as confirmed.
constexpr double agreement_scale = 1.5;
/// Smoothing makes neighbouring residuals alike: the plain standard error is too small by this.
constexpr double neighbour_inflation = 2;
/// A direction with a standard error above this is blind.
constexpr double blind_se_px = 0.3;
/// A far candidate is better than the prior only beyond this margin of agreement.
constexpr double candidate_margin = 0.08;
constexpr int candidate_peaks = 5;
constexpr int rounds = 10;

double tukey(double u) {
  return std::abs(u) < 1 ? (1 - u * u) * (1 - u * u) : 0;
}

std::optional<float> interpolated(const cv::Mat& image, double x, double y) {
  const auto left = static_cast<int>(std::floor(x));
  const auto top = static_cast<int>(std::floor(y));
  if (left < 0 || top < 0 || left + 1 >= image.cols || top + 1 >= image.rows) return std::nullopt;
  const auto u = static_cast<float>(x - left);
  const auto v = static_cast<float>(y - top);
  const float* row = image.ptr<float>(top) + left;
  const float* next = image.ptr<float>(top + 1) + left;
  return (1 - v) * ((1 - u) * row[0] + u * row[1]) + v * ((1 - u) * next[0] + u * next[1]);
}

}  // namespace

struct ShiftReference::Fit {
  double x = 0, y = 0;
  double gain = 1, offset = 0;
  double scale = 1;
  double moving_variance = 0;
  std::vector<float> values;      ///< of the image at each anchor; NaN outside
  std::vector<double> residuals;  ///< in expected deviations; NaN outside
  Eigen::Matrix4d information = Eigen::Matrix4d::Zero();
};

ShiftReference::ShiftReference(const Image& reduced, const Image* spread, double least_agreement)
    : image_(reduced), least_agreement_(least_agreement) {
  cv::Mat spread_matrix;
  if (spread) spread_matrix = as_matrix(*spread);
  choose_anchors(edges(spread ? &spread_matrix : nullptr));
  image_.spectrum();
}

std::vector<ShiftReference::Anchor> ShiftReference::edges(const cv::Mat* spread) const {
  const cv::Mat& image = image_.smoothed();
  const double noise_variance = image_.noise() * image_.noise();
  const double least = std::pow(edge_over_noise * gradient_noise_share * image_.noise(), 2);
  std::vector<Anchor> found;
  for (int y = 2; y + 2 < image.rows; ++y) {
    const float* row = image.ptr<float>(y);
    const float* above = image.ptr<float>(y - 1);
    const float* below = image.ptr<float>(y + 1);
    const float* varying = spread ? spread->ptr<float>(y) : nullptr;
    for (int x = 2; x + 2 < image.cols; ++x) {
      const float gradient_x = 0.5F * (row[x + 1] - row[x - 1]);
      const float gradient_y = 0.5F * (below[x] - above[x]);
      const double squared = gradient_x * gradient_x + gradient_y * gradient_y;
      if (!(squared > least)) continue;
      const double varied = varying ? varying[x] : 0;
      const double variance =
          varied * varied + noise_variance + edge_tolerance_px * edge_tolerance_px * squared;
      found.push_back({static_cast<float>(x), static_cast<float>(y), row[x], gradient_x, gradient_y,
                       static_cast<float>(variance)});
    }
  }
  return found;
}

void ShiftReference::choose_anchors(std::vector<Anchor> candidates) {
  if (candidates.empty()) return;
  std::vector<double> values;
  for (const auto& one : candidates) values.push_back(one.value);
  const double contrast = quantile(values, 0.9) - quantile(values, 0.1);
  const auto tolerated = static_cast<float>(std::pow(contrast_tolerance * contrast, 2) + 1e-20);
  Eigen::Matrix2d tensor = Eigen::Matrix2d::Zero();
  for (auto& one : candidates) {
    one.variance += tolerated;
    const Eigen::Vector2d gradient(one.gradient_x, one.gradient_y);
    tensor += gradient * gradient.transpose() / one.variance;
  }
  const Eigen::Matrix2d directions =
      Eigen::SelfAdjointEigenSolver<Eigen::Matrix2d>(tensor).eigenvectors();
  directions_ = {directions(0, 0), directions(1, 0), directions(0, 1), directions(1, 1)};
  const std::size_t half = anchor_count / 2;
  for (int k = 0; k < 2 && !candidates.empty(); ++k) {  // the weaker direction first
    const Eigen::Vector2d direction = directions.col(k);
    const auto strength = [&](const Anchor& one) {
      const double along = one.gradient_x * direction.x() + one.gradient_y * direction.y();
      return along * along / one.variance;
    };
    const auto stronger = [&](const Anchor& a, const Anchor& b) {
      const double sa = strength(a);
      const double sb = strength(b);
      return sa != sb ? sa > sb : (a.y != b.y ? a.y < b.y : a.x < b.x);
    };
    const auto count = static_cast<std::ptrdiff_t>(std::min(half, candidates.size()));
    if (count < static_cast<std::ptrdiff_t>(candidates.size()))
      std::nth_element(candidates.begin(), candidates.begin() + count, candidates.end(), stronger);
    anchors_.insert(anchors_.end(), candidates.begin(), candidates.begin() + count);
    candidates.erase(candidates.begin(), candidates.begin() + count);
  }
  // In the order of the rows, memory is read along.
  std::sort(anchors_.begin(), anchors_.end(),
            [](const Anchor& a, const Anchor& b) { return a.y != b.y ? a.y < b.y : a.x < b.x; });
}

void ShiftReference::sample(const MovingImage& moving, Fit& fit) const {
  const float none = std::numeric_limits<float>::quiet_NaN();
  fit.values.resize(anchors_.size());
  for (std::size_t i = 0; i < anchors_.size(); ++i)
    fit.values[i] = interpolated(moving.smoothed(), anchors_[i].x + fit.x, anchors_[i].y + fit.y)
                        .value_or(none);
}

/// One Gauss-Newton step in shift, gain and offset. False when there is nothing to solve.
bool ShiftReference::improve(Fit& fit) const {
  fit.residuals.assign(anchors_.size(), std::numeric_limits<double>::quiet_NaN());
  std::vector<double> sizes;
  for (std::size_t i = 0; i < anchors_.size(); ++i) {
    if (!std::isfinite(fit.values[i])) continue;
    const double rest = fit.values[i] - fit.gain * anchors_[i].value - fit.offset;
    fit.residuals[i] = rest / std::sqrt(anchors_[i].variance + fit.moving_variance);
    sizes.push_back(std::abs(fit.residuals[i]));
  }
  if (sizes.size() < 8) return false;
  fit.scale = std::max(1.0, 1.4826 * median(std::move(sizes)));
  Eigen::Matrix4d normal = Eigen::Matrix4d::Zero();
  Eigen::Vector4d right = Eigen::Vector4d::Zero();
  for (std::size_t i = 0; i < anchors_.size(); ++i) {
    if (!std::isfinite(fit.residuals[i])) continue;
    const auto& one = anchors_[i];
    const double variance = one.variance + fit.moving_variance;
    const double weight = tukey(fit.residuals[i] / (tukey_cut * fit.scale)) / variance;
    if (weight <= 0) continue;
    const Eigen::Vector4d slope(fit.gain * one.gradient_x, fit.gain * one.gradient_y, -one.value,
                                -1);
    normal.noalias() += weight * slope * slope.transpose();
    right.noalias() -= weight * fit.residuals[i] * std::sqrt(variance) * slope;
  }
  fit.information = normal;
  // Directions without information get no step: a hair of damping, relative to the stronger one.
  const double damping = 1e-6 * std::max(normal(0, 0), normal(1, 1));
  normal(0, 0) += damping;
  normal(1, 1) += damping;
  const Eigen::Vector4d step = normal.ldlt().solve(right);
  if (!step.allFinite()) return false;
  fit.x += std::clamp(step[0], -2.0, 2.0);
  fit.y += std::clamp(step[1], -2.0, 2.0);
  fit.gain = std::max(fit.gain + step[2], 0.05);
  fit.offset += step[3];
  return true;
}

Shift ShiftReference::refine(const MovingImage& moving, double x, double y, double prior_x,
                             double prior_y) const {
  Fit fit;
  fit.x = x;
  fit.y = y;
  fit.moving_variance = moving.noise() * moving.noise();
  sample(moving, fit);
  std::vector<double> here;
  std::vector<double> there;
  for (std::size_t i = 0; i < anchors_.size(); ++i) {
    if (!std::isfinite(fit.values[i])) continue;
    here.push_back(anchors_[i].value);
    there.push_back(fit.values[i]);
  }
  if (here.size() >= 8) {
    const double spread = robust_sd(here);
    if (spread > 0) fit.gain = std::max(robust_sd(there) / spread, 0.05);
    fit.offset = median(there) - fit.gain * median(here);
  }
  for (int round = 0; round < rounds; ++round) {
    const double last_x = fit.x;
    const double last_y = fit.y;
    if (!improve(fit)) break;
    sample(moving, fit);
    if (std::hypot(fit.x - last_x, fit.y - last_y) < 2e-3) break;
  }
  return judge(fit, prior_x, prior_y);
}

/// Standard errors and agreement by direction; blind directions go back to the prior.
Shift ShiftReference::judge(const Fit& fit, double prior_x, double prior_y) const {
  Shift shift;
  shift.gain = fit.gain;
  shift.offset = fit.offset;
  Eigen::Matrix2d seen = Eigen::Matrix2d::Zero();
  Eigen::Matrix2d confirmed = Eigen::Matrix2d::Zero();
  for (std::size_t i = 0; i < std::min(anchors_.size(), fit.values.size()); ++i) {
    const auto& one = anchors_[i];
    const Eigen::Vector2d gradient(one.gradient_x, one.gradient_y);
    const double variance = one.variance + fit.moving_variance;
    const Eigen::Matrix2d part = gradient * gradient.transpose() / variance;
    seen += part;
    if (!std::isfinite(fit.values[i])) continue;
    const double rest = fit.values[i] - fit.gain * one.value - fit.offset;
    confirmed += tukey(rest / std::sqrt(variance) / (tukey_cut * agreement_scale)) * part;
  }
  const Eigen::Matrix2d plane = fit.information.topLeftCorner<2, 2>();
  const Eigen::Matrix2d light = fit.information.bottomRightCorner<2, 2>();
  const Eigen::Matrix2d cross = fit.information.topRightCorner<2, 2>();
  Eigen::Matrix2d information = plane;
  if (light.determinant() > 0) information -= cross * light.inverse() * cross.transpose();
  const Eigen::SelfAdjointEigenSolver<Eigen::Matrix2d> directions(information);
  Eigen::Vector2d change(fit.x - prior_x, fit.y - prior_y);
  shift.se = 1e9;
  for (int k = 0; k < 2; ++k) {
    const Eigen::Vector2d direction = directions.eigenvectors().col(k);
    const double strength = std::max(directions.eigenvalues()[k], 1e-30);
    const double se = neighbour_inflation * fit.scale / std::sqrt(strength);
    const double total = direction.dot(seen * direction);
    const double share = total > 0 ? direction.dot(confirmed * direction) / total : 0;
    if (se < blind_se_px && share > least_agreement_) {
      shift.se = std::min(shift.se, se);
      continue;
    }
    change -= change.dot(direction) * direction;
    ++shift.blind_directions;
    shift.blind_x = direction.x();
    shift.blind_y = direction.y();
  }
  if (shift.blind_directions == 2) shift.blind_x = shift.blind_y = 0;
  shift.x = prior_x + change.x();
  shift.y = prior_y + change.y();
  shift.agreement = 1;
  for (std::size_t k = 0; k < 2; ++k) {
    const Eigen::Vector2d direction(directions_[2 * k], directions_[2 * k + 1]);
    const double total = direction.dot(seen * direction);
    shift.agreement =
        std::min(shift.agreement, total > 0 ? direction.dot(confirmed * direction) / total : 0.0);
  }
  return shift;
}

std::vector<cv::Point2d> ShiftReference::peaks(const MovingImage& moving) const {
  const cv::Mat& reference = image_.spectrum();
  const cv::Mat& other = moving.spectrum();
  if (reference.size() != other.size()) return {};
  cv::Mat power;
  cv::mulSpectrums(other, reference, power, 0, true);
  // Whitened above the noise, then a soft low pass: the finest waves are noise only.
  double mean = 0;
  for (int y = 0; y < power.rows; ++y)
    for (int x = 0; x < power.cols; ++x) {
      const auto& one = power.at<cv::Vec2f>(y, x);
      mean += std::hypot(one[0], one[1]);
    }
  const auto floor = static_cast<float>(0.05 * mean / static_cast<double>(power.total()) + 1e-30);
  for (int y = 0; y < power.rows; ++y) {
    const double v = std::min(y, power.rows - y) / static_cast<double>(power.rows);
    for (int x = 0; x < power.cols; ++x) {
      const double u = std::min(x, power.cols - x) / static_cast<double>(power.cols);
      auto& one = power.at<cv::Vec2f>(y, x);
      const float size = std::hypot(one[0], one[1]) + floor;
      one *= static_cast<float>(std::exp(-(u * u + v * v) / (2 * 0.2 * 0.2))) / size;
    }
  }
  cv::Mat correlation;
  cv::dft(power, correlation, cv::DFT_INVERSE | cv::DFT_REAL_OUTPUT);
  const double factor = moving.thumb_factor();
  std::vector<cv::Point2d> found;
  for (int k = 0; k < candidate_peaks; ++k) {
    int best_x = 0;
    int best_y = 0;
    float best = 0;
    for (int y = 0; y < correlation.rows; ++y)
      for (int x = 0; x < correlation.cols; ++x)
        if (correlation.at<float>(y, x) > best) {
          best = correlation.at<float>(y, x);
          best_x = x;
          best_y = y;
        }
    if (best <= 0) break;
    const auto wrapped = [](int at, int size) { return (at % size + size) % size; };
    const auto value = [&](int x, int y) -> double {
      return correlation.at<float>(wrapped(y, correlation.rows), wrapped(x, correlation.cols));
    };
    const auto vertex = [](double before, double at, double after) {
      const double bend = before - 2 * at + after;
      return bend < 0 ? std::clamp(0.5 * (before - after) / bend, -0.5, 0.5) : 0.0;
    };
    const double x = best_x + vertex(value(best_x - 1, best_y), best, value(best_x + 1, best_y));
    const double y = best_y + vertex(value(best_x, best_y - 1), best, value(best_x, best_y + 1));
    found.emplace_back(factor * (x > correlation.cols / 2.0 ? x - correlation.cols : x),
                       factor * (y > correlation.rows / 2.0 ? y - correlation.rows : y));
    for (int dy = -3; dy <= 3; ++dy)
      for (int dx = -3; dx <= 3; ++dx)
        correlation.at<float>(wrapped(best_y + dy, correlation.rows),
                              wrapped(best_x + dx, correlation.cols)) = 0;
  }
  return found;
}

Shift ShiftReference::find(const MovingImage& moving, double prior_x, double prior_y,
                           bool wide_search) const {
  auto best = refine(moving, prior_x, prior_y, prior_x, prior_y);
  if (!wide_search) return best;
  double to_beat = best.agreement + candidate_margin;
  for (const auto& peak : peaks(moving)) {
    const auto other = refine(moving, peak.x, peak.y, prior_x, prior_y);
    if (other.agreement <= to_beat) continue;
    best = other;
    to_beat = other.agreement;
  }
  return best;
}

}  // namespace wavefount::tube
