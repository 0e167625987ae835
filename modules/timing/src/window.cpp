#include "wavefount/timing/window.h"

#include <algorithm>
#include <cmath>

#include "wavefount/core/robust.h"

namespace wavefount {

namespace {

constexpr double fewest_before = 6, fewest_after = 5;  // frames
constexpr double outlier_sigma = 5;
// The onset may lie this many frames before the last value near the top: noise decides which that
// is.
constexpr double onset_margin = 2.5;

// Whether a value stands alone off its neighbours (Hampel 1974), at one side of the fall.
bool stands_alone(const Course& course, std::size_t i, std::size_t from, std::size_t to) {
  std::vector<double> near;
  const std::size_t first = i >= from + 3 ? i - 3 : from;
  for (std::size_t j = first; j < std::min(i + 4, to); ++j)
    if (j != i) near.push_back(course.signal[j]);
  if (near.size() < 4) return false;
  const double spread = std::max(robust_sd(near), course.noise);
  return std::abs(course.signal[i] - median(near)) > outlier_sigma * spread;
}

}  // namespace

FallWindow make_window(const Course& course, const Fall& fall, std::size_t start, double radius_um,
                       const WindowSettings& settings) {
  FallWindow window;
  const double interval = course.interval_min, shift = settings.stamp_shift_min;
  const auto& time = course.time_min;
  window.interval_min = interval;
  window.exposure_min = settings.exposure_min;
  window.radius_um = radius_um;
  window.level = fall.level;
  window.base = fall.base;
  window.age_min = time[fall.half] - time[start];
  const double margin = onset_margin * interval + fall.duration_min(course);
  window.earliest_min = std::max(time[fall.last_high] - margin, time[start] - interval) + shift;
  window.latest_min = time[fall.half] + settings.exposure_min + shift;
  const double from = window.earliest_min - shift + 0.5 * margin -
                      std::max(settings.before_min, fewest_before * interval);
  const double to = time[fall.low] + std::max(settings.after_min, fewest_after * interval);
  for (std::size_t i = start; i < std::max(fall.end, fall.half + 1); ++i) {
    if (time[i] < from || time[i] > to) continue;
    const bool before = time[i] + shift < window.earliest_min;
    const bool after = i > fall.low + 2;
    if (before && stands_alone(course, i, start, fall.last_high)) continue;
    if (after && stands_alone(course, i, fall.low, fall.end)) continue;
    window.samples.push_back({time[i] + shift, course.signal[i], course.variance[i]});
  }
  return window;
}

}  // namespace wavefount
