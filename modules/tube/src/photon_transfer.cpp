#include "wavefount/tube/photon_transfer.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <utility>

#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"

namespace wavefount::tube {
namespace {

/// Side of a tile: 64 Haar details make a variance good to 18 %, while few tiles hold an edge.
constexpr int tile_px = 16;
/// Level classes for the start of the fit: enough for a slope, each with many tiles.
constexpr std::size_t classes = 24;
/// Read noise assumed where neither it nor the offset is known: variance against mean gives only
/// one number for the two. Scientific cameras have 1 to 3 electrons.
constexpr double usual_read_noise_electrons = 2;
/// A slope less certain than this is no measurement of the gain.
constexpr double largest_relative_se = 0.25;

struct Tile {
  double level = 0;
  double detail = 0;  ///< mean square of the Haar detail
  bool good = false;
};

/// `second` may be null. The diagonal detail of one 2 × 2 square has the variance of one pixel.
Tile measure_tile(const float* first, const float* second, int stride, double saturation) {
  double level = 0;
  double detail = 0;
  float lowest = first[0];
  float highest = first[0];
  for (int y = 0; y < tile_px; y += 2) {
    for (int x = 0; x < tile_px; x += 2) {
      double haar = 0;
      for (int k = 0; k < 4; ++k) {
        const int at = (y + k / 2) * stride + x + k % 2;
        const double sign = (k == 1 || k == 2) ? -1 : 1;
        const double other = second ? second[at] : first[at];
        level += first[at] + other;
        haar += sign * (second ? first[at] - other : first[at]);
        lowest = std::min({lowest, first[at], static_cast<float>(other)});
        highest = std::max({highest, first[at], static_cast<float>(other)});
      }
      detail += haar * haar / 4;
    }
  }
  Tile tile;
  tile.level = level / (2.0 * tile_px * tile_px);
  tile.detail = detail / (tile_px * tile_px / 4.0) / (second ? 2 : 1);
  tile.good = std::isfinite(level) && std::isfinite(detail) && highest > lowest &&
              highest < saturation && tile.detail > 0;
  return tile;
}

void add_tiles(const Image& first, const Image* second, double saturation,
               std::vector<NoisePoint>& points) {
  const int width = image_width(first);
  const int height = image_height(first);
  for (int y = 0; y + tile_px <= height; y += tile_px) {
    for (int x = 0; x + tile_px <= width; x += tile_px) {
      const auto at = static_cast<std::ptrdiff_t>(y) * width + x;
      const auto tile =
          measure_tile(first.GetBufferPointer() + at,
                       second ? second->GetBufferPointer() + at : nullptr, width, saturation);
      if (tile.good) points.push_back({tile.level, tile.detail});
    }
  }
}

/// Medians of equally filled level classes, rising level.
std::vector<NoisePoint> class_medians(std::vector<NoisePoint> points) {
  std::sort(points.begin(), points.end(), [](const NoisePoint& a, const NoisePoint& b) {
    return std::pair(a.level, a.variance) < std::pair(b.level, b.variance);
  });
  const std::size_t count = std::min(classes, points.size());
  std::vector<NoisePoint> medians;
  for (std::size_t k = 0; k < count; ++k) {
    std::vector<double> levels;
    std::vector<double> variances;
    for (std::size_t i = k * points.size() / count; i < (k + 1) * points.size() / count; ++i) {
      levels.push_back(points[i].level);
      variances.push_back(points[i].variance);
    }
    medians.push_back({median(std::move(levels)), median(std::move(variances))});
  }
  return medians;
}

NoiseLine first_guess(const std::vector<NoisePoint>& points, double fixed_slope) {
  const auto medians = class_medians(points);
  NoiseLine line;
  line.slope = fixed_slope;
  if (fixed_slope <= 0) {
    std::vector<double> slopes;
    for (std::size_t i = 0; i < medians.size(); ++i)
      for (std::size_t j = i + 1; j < medians.size(); ++j)
        if (medians[j].level > medians[i].level)
          slopes.push_back((medians[j].variance - medians[i].variance) /
                           (medians[j].level - medians[i].level));
    line.slope = median(std::move(slopes));
  }
  std::vector<double> rests;
  for (const auto& one : medians) rests.push_back(one.variance - line.slope * one.level);
  line.intercept = median(std::move(rests));
  return line;
}

struct Sums {
  double w = 0, x = 0, y = 0, xx = 0, xy = 0;
};

/// One round of weighted least squares; weights from the current line.
void refine(const std::vector<NoisePoint>& points, double floor, bool slope_fixed,
            NoiseLine& line) {
  std::vector<double> scaled;
  scaled.reserve(points.size());
  const auto expected = [&](const NoisePoint& point) {
    return std::max(line.intercept + line.slope * point.level, floor);
  };
  for (const auto& point : points) scaled.push_back(point.variance / expected(point) - 1);
  const double scale = std::max(robust_sd(scaled), 1e-6);
  Sums sums;
  double weighted_square = 0;
  for (std::size_t i = 0; i < points.size(); ++i) {
    // Tukey's biweight at 4.685 scales: 95 % efficient on normal data.
    const double u = scaled[i] / (4.685 * scale);
    if (std::abs(u) >= 1) continue;
    const double tukey = (1 - u * u) * (1 - u * u);
    const double w = tukey / std::pow(expected(points[i]), 2);
    const double x = points[i].level;
    const double y = points[i].variance;
    sums.w += w;
    sums.x += w * x;
    sums.y += w * y;
    sums.xx += w * x * x;
    sums.xy += w * x * y;
    weighted_square += w;
  }
  if (weighted_square <= 0) return;
  const double spread = sums.xx - sums.x * sums.x / sums.w;
  if (!slope_fixed && spread > 0) {
    line.slope = (sums.xy - sums.x * sums.y / sums.w) / spread;
    line.slope_se = scale / std::sqrt(spread);
  }
  line.intercept = (sums.y - line.slope * sums.x) / sums.w;
}

}  // namespace

void add_pair(const Image& first, const Image& second, double saturation,
              std::vector<NoisePoint>& points) {
  add_tiles(first, &second, saturation, points);
}

void add_single(const Image& image, double saturation, std::vector<NoisePoint>& points) {
  add_tiles(image, nullptr, saturation, points);
}

NoiseLine fit_noise(const std::vector<NoisePoint>& points, double fixed_slope) {
  auto line = first_guess(points, fixed_slope);
  std::vector<double> variances;
  for (const auto& point : points) variances.push_back(point.variance);
  // The expected variance of the darkest tiles must not reach zero, or they would take all weight.
  const double floor = std::max(quantile(std::move(variances), 0.02) / 2, 1e-30);
  for (int round = 0; round < 10; ++round) refine(points, floor, fixed_slope > 0, line);
  return line;
}

namespace {

/// Gain where the levels do not spread enough for a slope: all noise is taken for shot noise.
double gain_without_slope(const std::vector<NoisePoint>& points, double offset) {
  std::vector<double> ratios;
  for (const auto& point : points)
    if (point.level > offset) ratios.push_back((point.level - offset) / point.variance);
  const double gain = median(std::move(ratios));
  return gain > 0 ? gain : 1;
}

void split_intercept(const NoiseLine& line, const CameraSettings& given, int z_planes,
                     double darkest_level, CameraModel& camera, std::vector<std::string>& notes) {
  const double slope = 1 / camera.gain_electrons_per_count;
  const double planes = std::sqrt(static_cast<double>(z_planes));
  if (!camera.offset_given) {
    const double read = given.read_noise_electrons.value_or(usual_read_noise_electrons) * planes;
    const double offset = -line.intercept / slope + read * read * slope;
    camera.dark_offset_counts = std::clamp(offset, 0.0, std::max(0.0, darkest_level));
    notes.push_back("The dark offset is not known; " + rounded_text(camera.dark_offset_counts, 3) +
                    " counts follow from the noise; dark_offset_counts in the sidecar gives it.");
  }
  const double squared = (line.intercept + slope * camera.dark_offset_counts) / (slope * slope);
  camera.read_noise_electrons = given.read_noise_electrons ? *given.read_noise_electrons * planes
                                                           : std::sqrt(std::max(0.0, squared));
}

}  // namespace

CameraModel estimate_camera(const std::vector<NoisePoint>& points, const CameraSettings& given,
                            int z_planes, double darkest_level, double saturation,
                            std::vector<std::string>& notes) {
  CameraModel camera;
  camera.saturation_counts = saturation;
  camera.gain_given = given.gain_electrons_per_count.has_value();
  camera.offset_given = given.dark_offset_counts.has_value();
  camera.dark_offset_counts = given.dark_offset_counts.value_or(0) * z_planes;
  camera.gain_electrons_per_count = given.gain_electrons_per_count.value_or(1);
  camera.read_noise_electrons = given.read_noise_electrons.value_or(0) * std::sqrt(z_planes);
  // Fewer tiles than this give no line worth having.
  constexpr std::size_t fewest_tiles = 16;
  if (points.size() < fewest_tiles) {
    notes.push_back(
        "The film shows too little for the camera's noise; a gain of 1 electron a count is assumed "
        "where the sidecar gives none.");
    return camera;
  }
  const auto line = fit_noise(points, camera.gain_given ? 1 / *given.gain_electrons_per_count : 0);
  if (!camera.gain_given) {
    const bool sloped = line.slope > 0 && line.slope_se < largest_relative_se * line.slope;
    if (!sloped) {
      if (!camera.offset_given) camera.dark_offset_counts = std::max(0.0, darkest_level) / 2;
      camera.gain_electrons_per_count = gain_without_slope(points, camera.dark_offset_counts);
      notes.push_back(
          "The film is too even for gain and read noise apart; all noise is taken for shot noise.");
      return camera;
    }
    camera.gain_electrons_per_count = 1 / line.slope;
  }
  split_intercept(line, given, z_planes, darkest_level, camera, notes);
  return camera;
}

void SaturationFinder::add(const Image& plane) {
  const float* pixels = plane.GetBufferPointer();
  const auto count =
      static_cast<std::size_t>(image_width(plane)) * static_cast<std::size_t>(image_height(plane));
  float highest = 0;
  float lowest = std::numeric_limits<float>::max();
  for (std::size_t i = 0; i < count; ++i) {
    highest = std::max(highest, pixels[i]);
    lowest = std::min(lowest, pixels[i]);
  }
  if (!std::isfinite(highest) || highest <= lowest || highest < static_cast<float>(highest_))
    return;
  if (highest > static_cast<float>(highest_)) at_highest_ = near_highest_ = 0;
  highest_ = highest;
  // The 2 % below the highest value; at least four steps of an integer film.
  const float near = std::min(0.98F * highest, bit_depth_ >= 32 ? highest : highest - 4.5F);
  for (std::size_t i = 0; i < count; ++i) {
    if (pixels[i] == highest)
      ++at_highest_;
    else if (pixels[i] > near && pixels[i] < highest)
      ++near_highest_;
  }
}

double SaturationFinder::saturation() const {
  const double full = bit_depth_ >= 32 ? static_cast<double>(std::numeric_limits<float>::max())
                                       : std::ldexp(1.0, bit_depth_) - 1;
  // Light falls off towards its brightest values; where far more pixels share the very highest one
  // than lie just below it, the camera was full.
  constexpr long long fewest = 50;
  const bool piled = at_highest_ >= fewest && at_highest_ > 2 * near_highest_;
  return piled ? std::min(full, highest_) : full;
}

}  // namespace wavefount::tube
