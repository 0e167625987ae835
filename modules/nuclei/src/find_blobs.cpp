#include "wavefount/nuclei/find_blobs.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>
#include <opencv2/imgproc.hpp>

#include "wavefount/core/robust.h"
#include "wavefount/nuclei/scale_space.h"

namespace wavefount::nuclei {
namespace {

/// The radius of a blob's scale may exceed that of its nucleus by blur and by half a scale.
constexpr double widest_for_room = 1.5;
/// A frame of pure texture must not stall the film; no field of nuclei holds as many.
constexpr std::size_t most_blobs = 4000;
/// The spread of a scale is read at this many places.
constexpr int spread_samples = 1500;
/// With fewer values a spread is not known.
constexpr std::size_t fewest_values = 40;
/// Independent places that weigh as much as the noise between neighbouring pixels does.
constexpr double camera_weight = 30;
/// The spread may stretch or shrink the camera's noise by no more than this.
constexpr double least_ratio = 0.5;
constexpr double greatest_ratio = 10;

int scaled(double value, int step) {
  return static_cast<int>(std::lround(value / step));
}

/// Vertex of the parabola through three equidistant values, in steps, within half a step; 0 where
/// one of them lies outside of the image.
double vertex(double before, double here, double after) {
  if (!std::isfinite(before) || !std::isfinite(after)) return 0;
  const double bend = before - 2 * here + after;
  return bend < 0 ? std::clamp(0.5 * (before - after) / bend, -0.5, 0.5) : 0.0;
}

class Search {
 public:
  Search(const BlobField& field, const std::vector<BlobScale>& scales,
         const BlobThresholds& thresholds)
      : tubes_(field.tubes),
        wall_distance_(field.wall_distance),
        cytoplasm_(field.cytoplasm),
        space_(field.excess, scales),
        thresholds_(thresholds) {
    pixel_ratio_ = pixel_noise_ratio(field.excess);
  }

  std::vector<Blob> run() {
    std::vector<Blob> blobs;
    for (int scale = 0; scale < static_cast<int>(space_.scales().size()); ++scale) {
      auto found = maxima(scale);
      const double ratio = spread_ratio(scale, found);
      for (Blob& blob : found) {
        blob.sigma /= ratio;
        if (blob.sigma >= thresholds_.sigma) blobs.push_back(blob);
      }
    }
    return separated(std::move(blobs));
  }

 private:
  const BlobScale& plan(int scale) const {
    return space_.scales()[static_cast<std::size_t>(scale)];
  }

  /// Spatial maxima of one scale above the camera's noise, whatever their shape.
  std::vector<Blob> maxima(int scale) const {
    const int width = space_.smoothed(scale).cols;
    const int height = space_.smoothed(scale).rows;
    const auto padded = static_cast<std::size_t>(width) + 2;
    const float none = -std::numeric_limits<float>::infinity();
    std::vector<float> rows[3];
    for (auto& row : rows) row.assign(padded, none);
    const auto floor = static_cast<float>(thresholds_.sigma * least_ratio * plan(scale).noise_gain *
                                          cytoplasm_.lowest_noise());
    space_.response_row(scale, 0, rows[1].data() + 1);
    std::vector<Blob> found;
    for (int y = 0; y < height; ++y) {
      auto& above = rows[y % 3];
      auto& here = rows[(y + 1) % 3];
      auto& below = rows[(y + 2) % 3];
      if (y + 1 < height)
        space_.response_row(scale, y + 1, below.data() + 1);
      else
        below.assign(padded, none);
      for (std::size_t i = 1; i + 1 < padded; ++i) {
        if (here[i] <= floor || here[i] < here[i - 1] || here[i] <= here[i + 1]) continue;
        if (!tops(here[i], &above[i - 1], &below[i - 1])) continue;
        add(scale, static_cast<int>(i) - 1, y, {&above[i], &here[i], &below[i]}, found);
      }
    }
    return found;
  }

  static bool tops(float value, const float* above, const float* below) {
    for (int i = 0; i < 3; ++i)
      if (value < above[i] || value <= below[i]) return false;
    return true;
  }

  struct Around {
    const float *above, *here, *below;
  };

  void add(int scale, int column, int row, const Around& around, std::vector<Blob>& found) const {
    const BlobScale& used = plan(scale);
    const int x = std::min(column * used.step, tubes_.cols - 1);
    const int y = std::min(row * used.step, tubes_.rows - 1);
    if (tubes_(y, x) == 0) return;
    Blob blob;
    blob.scale = scale;
    blob.response = *around.here;
    blob.sigma = blob.response / (used.noise_gain * cytoplasm_.noise_at(x, y));
    // Mirroring doubles the noise's variance in the half a filter that lies outside.
    if (near_border(x, y, used.sigma_px)) blob.sigma /= std::numbers::sqrt2;
    if (blob.sigma < thresholds_.sigma * least_ratio) return;
    blob.roundness = space_.roundness(scale, column, row);
    const double dx = vertex(around.here[-1], *around.here, around.here[1]);
    const double dy = vertex(*around.above, *around.here, *around.below);
    blob.x = std::clamp((column + dx) * used.step, 0.0, tubes_.cols - 1.0);
    blob.y = std::clamp((row + dy) * used.step, 0.0, tubes_.rows - 1.0);
    blob.radius = used.radius_px * std::pow(2.0, 0.5 * scale_offset(blob));
    found.push_back(blob);
  }

  bool near_border(int x, int y, double margin) const {
    return x < margin || y < margin || x >= tubes_.cols - margin || y >= tubes_.rows - margin;
  }

  /// Where between the scales the response peaks, in scales from the blob's own.
  double scale_offset(const Blob& blob) const {
    const double before = response_near(blob.scale - 1, blob);
    const double after = response_near(blob.scale + 1, blob);
    if (before <= 0 || after <= 0) return 0;
    return vertex(before, blob.response, after);
  }

  double response_near(int scale, const Blob& blob) const {
    if (scale < 0 || scale >= static_cast<int>(space_.scales().size())) return 0;
    const cv::Mat1f& level = space_.smoothed(scale);
    const int column = std::clamp(scaled(blob.x, plan(scale).step), 0, level.cols - 1);
    const int row = std::clamp(scaled(blob.y, plan(scale).step), 0, level.rows - 1);
    return space_.response(scale, column, row);
  }

  /// Noise between neighbouring pixels over the camera's, by a mask blind to whatever is smooth
  /// (Immerkaer 1996, Comput. Vis. Image Underst. 64:300).
  double pixel_noise_ratio(const cv::Mat1f& excess) const {
    const int stride = std::max(
        1, static_cast<int>(std::sqrt(static_cast<double>(excess.total()) / spread_samples)));
    std::vector<double> values;
    for (int y = 1; y + 1 < excess.rows; y += stride) {
      for (int x = 1; x + 1 < excess.cols; x += stride) {
        if (tubes_(y - 1, x - 1) == 0 || tubes_(y - 1, x + 1) == 0 || tubes_(y + 1, x - 1) == 0 ||
            tubes_(y + 1, x + 1) == 0)
          continue;
        const auto bend = [&](int row) {
          return excess(row, x - 1) - 2 * excess(row, x) + excess(row, x + 1);
        };
        const double noise = cytoplasm_.noise_at(x, y);
        if (noise > 0) values.push_back((bend(y - 1) - 2 * bend(y) + bend(y + 1)) / (6 * noise));
      }
    }
    return values.size() < fewest_values
               ? 1.0
               : std::clamp(robust_sd(values), least_ratio, greatest_ratio);
  }

  /// By how much the response between the candidates spreads wider than the camera's noise does.
  double spread_ratio(int scale, const std::vector<Blob>& found) const {
    const BlobScale& used = plan(scale);
    const cv::Mat1f& level = space_.smoothed(scale);
    const cv::Mat1b free = between_candidates(scale, found);
    const double every =
        std::max(1.0, std::sqrt(static_cast<double>(level.total()) / spread_samples));
    std::vector<double> values;
    for (double y = 0; y < level.rows; y += every) {
      for (double x = 0; x < level.cols; x += every) {
        const int column = static_cast<int>(x);
        const int row = static_cast<int>(y);
        if (free(row, column) == 0) continue;
        const double noise = cytoplasm_.noise_at(column * used.step, row * used.step);
        if (noise > 0) values.push_back(space_.response(scale, column, row) / noise);
      }
    }
    if (values.size() < fewest_values) return pixel_ratio_;
    const double measured = robust_sd(values) / used.noise_gain;
    const double sigma = used.sigma_px / used.step;
    const double places = static_cast<double>(values.size()) *
                          std::min(1.0, every * every / (4 * std::numbers::pi * sigma * sigma));
    const double squared =
        (places * measured * measured + camera_weight * pixel_ratio_ * pixel_ratio_) /
        (places + camera_weight);
    return std::clamp(std::sqrt(squared), least_ratio, greatest_ratio);
  }

  /// Pixels of the scale's grid inside the tubes that no candidate's response reaches.
  cv::Mat1b between_candidates(int scale, const std::vector<Blob>& found) const {
    const BlobScale& used = plan(scale);
    const cv::Mat1f& level = space_.smoothed(scale);
    cv::Mat1b free(level.size());
    for (int y = 0; y < free.rows; ++y)
      for (int x = 0; x < free.cols; ++x)
        free(y, x) = tubes_(std::min(y * used.step, tubes_.rows - 1),
                            std::min(x * used.step, tubes_.cols - 1));
    for (const Blob& blob : found) {
      if (blob.sigma < thresholds_.sigma * pixel_ratio_) continue;
      const double reach = (blob.radius + 2 * used.sigma_px) / used.step;
      cv::circle(free, {scaled(blob.x, used.step), scaled(blob.y, used.step)},
                 static_cast<int>(std::ceil(reach)), cv::Scalar(0), cv::FILLED);
    }
    return free;
  }

  /// Strongest first; a weaker one inside a stronger one, of whatever scale, is the same blob, and
  /// on its rim a ripple of its edge.
  std::vector<Blob> separated(std::vector<Blob> blobs) const {
    std::erase_if(blobs, [&](const Blob& blob) {
      return blob.roundness < thresholds_.roundness || !has_room(blob);
    });
    std::stable_sort(blobs.begin(), blobs.end(),
                     [](const Blob& a, const Blob& b) { return a.response > b.response; });
    std::vector<Blob> kept;
    for (const Blob& blob : blobs) {
      if (kept.size() == most_blobs) break;
      if (std::none_of(kept.begin(), kept.end(),
                       [&](const Blob& stronger) { return same_blob(blob, stronger); }))
        kept.push_back(blob);
    }
    return kept;
  }

  /// A nucleus lies inside its tube; the mask is cut a pixel short of the wall.
  bool has_room(const Blob& blob) const {
    const int x = static_cast<int>(std::lround(blob.x));
    const int y = static_cast<int>(std::lround(blob.y));
    return blob.radius <= widest_for_room * (static_cast<double>(wall_distance_(y, x)) + 2);
  }

  static bool same_blob(const Blob& weaker, const Blob& stronger) {
    const double dx = weaker.x - stronger.x;
    const double dy = weaker.y - stronger.y;
    double reach = 0.75 * std::max(weaker.radius, stronger.radius);
    if (weaker.response < 0.6 * stronger.response)
      reach = std::max(reach, stronger.radius + 0.3 * weaker.radius);
    return dx * dx + dy * dy < reach * reach;
  }

  const cv::Mat1b& tubes_;
  const cv::Mat1f& wall_distance_;
  const Cytoplasm& cytoplasm_;
  ScaleSpace space_;
  BlobThresholds thresholds_;
  double pixel_ratio_ = 1;
};

}  // namespace

std::vector<Blob> find_blobs(const BlobField& field, const std::vector<BlobScale>& scales,
                             const BlobThresholds& thresholds) {
  if (field.excess.empty() || scales.empty()) return {};
  return Search(field, scales, thresholds).run();
}

}  // namespace wavefount::nuclei
