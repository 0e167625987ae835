#include "wavefount/timing/course.h"

#include <algorithm>
#include <cmath>
#include <map>

#include "wavefount/core/robust.h"

namespace wavefount {

namespace {

// A fall takes the signal below this share of its height, a rise lifts it by that much.
constexpr double fallen_share = 0.6;
constexpr double risen_share = 0.3;
// Swings below this many standard deviations of one value are noise.
constexpr double swing_sigma = 6;
// Heights, as shares of the fall, between which its duration is read: outside them noise and the
// slow tail of diffusion decide.
constexpr double near_top = 0.85;
constexpr double clearly_down = 0.4;
// No nucleus fills to four fifths within this time of being empty.
constexpr double springs_back_min = 0.7;
constexpr double longest_step_min = 3;
constexpr std::size_t level_samples = 5;

std::vector<double> running_median(const std::vector<double>& values) {
  std::vector<double> smooth = values;
  for (std::size_t i = 1; i + 1 < values.size(); ++i)
    smooth[i] = median({values[i - 1], values[i], values[i + 1]});
  return smooth;
}

double noise_of(const Course& course) {
  std::vector<double> stated, seconds;
  for (const double variance : course.variance) stated.push_back(std::sqrt(variance));
  for (std::size_t i = 1; i + 1 < course.size(); ++i)
    seconds.push_back(course.signal[i - 1] - 2 * course.signal[i] + course.signal[i + 1]);
  return std::max(median(std::move(stated)), robust_sd(seconds) / std::sqrt(6.0));
}

double interval_of(const std::vector<double>& times) {
  std::vector<double> steps;
  for (std::size_t i = 1; i < times.size(); ++i) steps.push_back(times[i] - times[i - 1]);
  return median(std::move(steps));
}

double median_between(const std::vector<double>& values, std::size_t from, std::size_t to) {
  return median({values.begin() + static_cast<std::ptrdiff_t>(from),
                 values.begin() + static_cast<std::ptrdiff_t>(to)});
}

// The lowest level that an empty aperture shows, and the height of the nucleus above it.
struct Range {
  double low = 0, height = 0;
};

Range range_of(const Course& course) {
  const double high = quantile(course.smooth, 0.95), low = quantile(course.smooth, 0.05);
  // A nucleus that never empties shows no low; its surrounding is zero by definition.
  const double base = low <= 0.5 * high ? low : 0.0;
  return {base, high - base};
}

// Values around the half-way crossing nearest the valley.
Fall describe(const Course& course, std::size_t peak, std::size_t valley, std::size_t end) {
  const auto& smooth = course.smooth;
  Fall fall;
  fall.peak = peak;
  fall.valley = valley;
  fall.end = end;
  const double middle = 0.5 * (smooth[peak] + smooth[valley]);
  fall.half = valley;
  while (fall.half > peak + 1 && smooth[fall.half - 1] < middle) --fall.half;
  const std::size_t before = fall.half > 1 + peak ? fall.half - 1 : fall.half;
  const std::size_t from = before > level_samples + peak ? before - level_samples : peak;
  fall.level = median_between(course.signal, from, std::max(before, from + 1));
  const std::size_t after = std::min(fall.half + 2, end - 1);
  fall.base = std::min(median_between(course.signal, after, end), smooth[fall.half]);
  const double drop = fall.level - fall.base;
  fall.last_high = fall.half - 1;
  while (fall.last_high > peak && smooth[fall.last_high] < fall.base + near_top * drop)
    --fall.last_high;
  fall.low = fall.half;
  while (fall.low + 1 < end && smooth[fall.low] > fall.base + clearly_down * drop) ++fall.low;
  return fall;
}

// Where the signal starts to rise again between the valley and the place where it clearly has.
std::size_t rise_start(const Course& course, std::size_t valley, std::size_t risen) {
  const double limit = course.smooth[valley] + 3 * course.noise;
  std::size_t start = risen;
  while (start > valley + 1 && course.smooth[start - 1] > limit) --start;
  // A newly found nucleus has risen already.
  for (std::size_t i = valley + 1; i < start; ++i)
    if (course.found[i]) return i;
  return start;
}

bool springs_back(const Course& course, const Fall& fall, std::size_t risen) {
  const double drop = fall.level - fall.base;
  std::size_t up = risen;
  while (up < course.size() && course.smooth[up] < fall.base + 0.8 * drop) ++up;
  if (up == course.size()) return false;
  std::size_t down = up;
  while (down > fall.valley && course.smooth[down] > fall.base + 0.3 * drop) --down;
  const double rise = course.time_min[up] - course.time_min[down];
  const double limit = course.interval_min <= longest_step_min
                           ? std::max(springs_back_min, 1.01 * course.interval_min)
                           : springs_back_min;
  return rise <= limit;
}

}  // namespace

double Fall::duration_min(const Course& course) const {
  return course.time_min[low] - course.time_min[last_high];
}

Course make_course(const Nucleus& nucleus, const ApertureTrace* trace, double first_min,
                   double last_min) {
  Course course;
  const auto add = [&](int frame, double time, double signal, double variance, bool found) {
    if (!std::isfinite(time) || !std::isfinite(signal) || !(variance > 0) ||
        !std::isfinite(variance) || time < first_min || time > last_min)
      return;
    if (!course.time_min.empty() && time <= course.time_min.back()) return;
    course.frame.push_back(frame);
    course.time_min.push_back(time);
    course.signal.push_back(signal);
    course.variance.push_back(variance);
    course.found.push_back(found);
  };
  if (trace && !trace->frame.empty()) {
    std::map<int, bool> found;
    for (const auto& point : nucleus.points) found[point.frame] = point.found;
    for (std::size_t i = 0; i < trace->frame.size(); ++i) {
      const auto at = found.find(trace->frame[i]);
      add(trace->frame[i], trace->time_min[i], trace->signal[i], trace->variance[i],
          at != found.end() && at->second);
    }
  } else {
    for (const auto& p : nucleus.points)
      if (p.found) add(p.frame, p.time_min, p.brightness, p.brightness_variance, true);
  }
  course.interval_min = interval_of(course.time_min);
  course.noise = noise_of(course);
  course.smooth = running_median(course.signal);
  return course;
}

Swings find_swings(const Course& course) {
  Swings swings;
  if (course.size() < 3) return swings;
  const auto& smooth = course.smooth;
  const auto [low, height] = range_of(course);
  bool high = smooth[0] - low > 0.5 * height;
  swings.starts_low = !high;
  std::size_t peak = 0, valley = 0;
  for (std::size_t i = 1; i < course.size(); ++i) {
    if (high) {
      if (smooth[i] > smooth[peak]) peak = i;
      const bool fallen = smooth[i] - low < fallen_share * (smooth[peak] - low) &&
                          smooth[peak] - smooth[i] > swing_sigma * course.noise;
      if (!fallen) continue;
      high = false;
      valley = i;
      swings.falls.push_back(describe(course, peak, valley, course.size()));
    } else {
      if (smooth[i] < smooth[valley]) valley = i;
      const double rise = std::max(risen_share * height, swing_sigma * course.noise);
      if (smooth[i] - smooth[valley] <= rise) continue;
      high = true;
      const std::size_t before = peak;
      peak = i;
      if (swings.falls.empty()) continue;
      auto& fall = swings.falls.back();
      fall = describe(course, fall.peak, valley, rise_start(course, valley, i));
      if (springs_back(course, fall, i)) {
        swings.falls.pop_back();
        if (smooth[before] > smooth[i]) peak = before;
      }
    }
  }
  if (!high && !swings.falls.empty())
    swings.falls.back() = describe(course, swings.falls.back().peak, valley, course.size());
  return swings;
}

}  // namespace wavefount
