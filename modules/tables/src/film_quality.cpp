#include "wavefount/tables/film_quality.h"

#include <algorithm>
#include <cmath>
#include <vector>

#include "wavefount/core/robust.h"

namespace wavefount {
namespace {

/// Pairs of frames grow with the square of their number; the slope is settled long before.
constexpr std::size_t most_bleaching_frames = 200;

struct LogLight {
  double time_min = 0;
  double log_counts = 0;  ///< logarithm of counts a pixel above the dark offset
};

std::vector<LogLight> log_light(const Observations& observations, const CameraModel& camera) {
  std::vector<LogLight> light;
  for (const auto& frame : observations.frames) {
    if (!frame.usable || frame.tube_pixels <= 0) continue;
    const double counts = frame.total_light / frame.tube_pixels - camera.dark_offset_counts;
    if (std::isfinite(counts) && counts > 0) light.push_back({frame.time_min, std::log(counts)});
  }
  return light;
}

std::vector<LogLight> thinned(const std::vector<LogLight>& light) {
  if (light.size() <= most_bleaching_frames) return light;
  std::vector<LogLight> few;
  for (std::size_t i = 0; i < most_bleaching_frames; ++i)
    few.push_back(light[i * (light.size() - 1) / (most_bleaching_frames - 1)]);
  return few;
}

}  // namespace

std::optional<double> bleaching_percent(const Observations& observations, const Tube& tube,
                                        const CameraModel* camera) {
  const bool closed = tube.measured && tube.left_end == Boundary::closed &&
                      tube.right_end == Boundary::closed && tube.upper_wall == Boundary::closed &&
                      tube.lower_wall == Boundary::closed;
  if (!closed || !camera) return std::nullopt;
  const auto light = thinned(log_light(observations, *camera));
  if (light.size() < 3) return std::nullopt;
  std::vector<double> slopes;
  for (std::size_t i = 0; i < light.size(); ++i) {
    for (std::size_t j = i + 1; j < light.size(); ++j) {
      const double step_min = light[j].time_min - light[i].time_min;
      if (step_min > 0) slopes.push_back((light[j].log_counts - light[i].log_counts) / step_min);
    }
  }
  if (slopes.empty()) return std::nullopt;
  const double span_min = light.back().time_min - light.front().time_min;
  return -100 * std::expm1(median(std::move(slopes)) * span_min);
}

std::optional<double> signal_to_noise(const Nuclei& nuclei, const CameraModel* camera) {
  if (!camera) return std::nullopt;
  std::vector<double> ratios;
  for (const auto& nucleus : nuclei.nuclei) {
    for (const auto& point : nucleus.points) {
      if (!point.found || point.doubtful) continue;
      const double variance = camera->variance(point.cytoplasm);
      if (variance > 0) ratios.push_back(point.brightness / std::sqrt(variance));
    }
  }
  if (ratios.empty()) return std::nullopt;
  return median(std::move(ratios));
}

std::optional<double> largest_drift_um(const Drift& drift, double pixel_um) {
  const std::size_t frames = std::min(drift.x_px.size(), drift.y_px.size());
  if (frames == 0) return std::nullopt;
  double largest_px = 0;
  for (std::size_t i = 0; i < frames; ++i)
    largest_px = std::max(largest_px,
                          std::hypot(drift.x_px[i] - drift.x_px[0], drift.y_px[i] - drift.y_px[0]));
  return largest_px * pixel_um;
}

std::optional<double> last_healthy_min(const FilmDescription& film, const Waves& waves) {
  if (film.overrides.last_healthy_min) return film.overrides.last_healthy_min;
  std::optional<double> healthy;
  if (!film.times_min.empty()) healthy = film.times_min.back();
  for (const auto& wave : waves.waves)
    if (wave.fate == Fate::terminal)
      healthy = std::min(healthy.value_or(wave.start_min), wave.start_min);
  return healthy;
}

}  // namespace wavefount
