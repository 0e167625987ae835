#include "wavefount/tube/drift.h"

#include <algorithm>
#include <cmath>
#include <cstddef>

#include "wavefount/core/robust.h"

namespace wavefount::tube {
namespace {

/// A step must exceed the usual step by this factor to be a jump or an outlier.
constexpr double unusual_steps = 8;
/// Frames on each side whose median tells a jump from an outlier.
constexpr std::ptrdiff_t side_frames = 3;
/// Registration below this quality says nothing.
constexpr double least_quality = 0.15;
/// Standard error claimed when a frame says none, full-size pixels.
constexpr double usual_se_px = 0.3;

struct Track {
  std::vector<double> x, y, se;
  std::vector<bool> known;
};

/// Frames that say nothing take their neighbours' place, linear in between.
void fill_gaps(Track& track) {
  const auto count = static_cast<std::ptrdiff_t>(track.x.size());
  std::ptrdiff_t before = -1;
  for (std::ptrdiff_t i = 0; i <= count; ++i) {
    if (i < count && !track.known[static_cast<std::size_t>(i)]) continue;
    for (std::ptrdiff_t k = before + 1; k < i; ++k) {
      const auto fill = [&](std::vector<double>& values) {
        if (before < 0 && i == count) return;
        const double left = values[static_cast<std::size_t>(before < 0 ? i : before)];
        const double right = values[static_cast<std::size_t>(i == count ? before : i)];
        const double part = static_cast<double>(k - before) / static_cast<double>(i - before);
        values[static_cast<std::size_t>(k)] = left + part * (right - left);
      };
      fill(track.x);
      fill(track.y);
    }
    before = i;
  }
}

/// Usual size of a step from frame to frame, and never less than the registration's own error.
double usual_step(const Track& track) {
  std::vector<double> steps;
  for (std::size_t i = 1; i < track.x.size(); ++i)
    steps.push_back(std::hypot(track.x[i] - track.x[i - 1], track.y[i] - track.y[i - 1]));
  return std::max(median(std::move(steps)), 0.05);
}

struct Place {
  double x = 0, y = 0;
  int count = 0;
};

/// Median place of the known frames from first to last.
Place median_place(const Track& track, std::ptrdiff_t first, std::ptrdiff_t last) {
  std::vector<double> x;
  std::vector<double> y;
  const auto count = static_cast<std::ptrdiff_t>(track.x.size());
  for (auto i = std::max<std::ptrdiff_t>(0, first); i <= std::min(count - 1, last); ++i) {
    if (!track.known[static_cast<std::size_t>(i)]) continue;
    x.push_back(track.x[static_cast<std::size_t>(i)]);
    y.push_back(track.y[static_cast<std::size_t>(i)]);
  }
  const int seen = static_cast<int>(x.size());
  return {median(std::move(x)), median(std::move(y)), seen};
}

/// Frames that stand apart from both sides while the sides agree.
void drop_outliers(Track& track, double limit) {
  const auto count = static_cast<std::ptrdiff_t>(track.x.size());
  std::vector<bool> keep = track.known;
  for (std::ptrdiff_t i = 0; i < count; ++i) {
    const auto at = static_cast<std::size_t>(i);
    if (!track.known[at]) continue;
    const auto before = median_place(track, i - side_frames, i - 1);
    const auto after = median_place(track, i + 1, i + side_frames);
    const auto far = [&](const Place& place) {
      return std::hypot(track.x[at] - place.x, track.y[at] - place.y) > limit;
    };
    if (before.count < 2 && after.count < 2) continue;
    if ((before.count < 2 || far(before)) && (after.count < 2 || far(after))) {
      const bool agree = before.count < 2 || after.count < 2 ||
                         std::hypot(before.x - after.x, before.y - after.y) < limit;
      // At the film's start and end one side alone decides; a jump next to it stays.
      if (agree && i > 0) keep[at] = false;
    }
  }
  track.known = keep;
}

std::vector<int> find_jumps(const Track& track, double limit) {
  std::vector<int> jumps;
  const auto count = static_cast<std::ptrdiff_t>(track.x.size());
  for (std::ptrdiff_t i = 1; i < count; ++i) {
    const auto at = static_cast<std::size_t>(i);
    const double step = std::hypot(track.x[at] - track.x[at - 1], track.y[at] - track.y[at - 1]);
    if (step <= limit / 2) continue;
    const auto before = median_place(track, i - side_frames, i - 1);
    const auto after = median_place(track, i, i + side_frames - 1);
    if (before.count == 0 || after.count == 0) continue;
    if (std::hypot(before.x - after.x, before.y - after.y) > limit)
      jumps.push_back(static_cast<int>(i));
  }
  return jumps;
}

/// One coordinate between jumps: local level model.
class LevelSmoother {
 public:
  LevelSmoother(const Track& track, std::vector<double>& values, const std::vector<int>& jumps)
      : track_(track), values_(values), jumps_(jumps) {}

  void run() {
    measure_noise();
    std::size_t first = 0;
    for (const int jump : jumps_) {
      smooth_part(first, static_cast<std::size_t>(jump));
      first = static_cast<std::size_t>(jump);
    }
    smooth_part(first, values_.size());
  }

 private:
  bool jumps_at(std::size_t i) const {
    return std::binary_search(jumps_.begin(), jumps_.end(), static_cast<int>(i));
  }

  /// White noise makes steps that follow one another oppose each other: their mean product is minus
  /// its variance. What is left of the steps' variance is the walk.
  void measure_noise() {
    std::vector<double> steps;
    for (std::size_t i = 1; i < values_.size(); ++i)
      if (!jumps_at(i)) steps.push_back(values_[i] - values_[i - 1]);
    const double scale = robust_sd(steps);
    double square = 0;
    double product = 0;
    int count = 0;
    for (std::size_t i = 1; i < steps.size(); ++i) {
      const double limit = 4 * scale;
      const double a = std::clamp(steps[i - 1], -limit, limit);
      const double b = std::clamp(steps[i], -limit, limit);
      square += b * b;
      product += a * b;
      ++count;
    }
    if (count < 8) return;
    noise_ = std::max(0.0, -product / count);
    walk_ = std::max(square / count - 2 * noise_, 0.01 * square / count);
  }

  void smooth_part(std::size_t first, std::size_t last) {
    if (noise_ <= 0 || walk_ <= 0 || last - first < 3) return;
    const std::size_t count = last - first;
    std::vector<double> level(count);
    std::vector<double> variance(count);
    for (std::size_t i = 0; i < count; ++i) {
      const double claimed = track_.se[first + i] * track_.se[first + i];
      const double noise =
          track_.known[first + i] ? std::max(std::min(noise_, claimed), 1e-8) : 1e6;
      if (i == 0) {
        level[i] = values_[first];
        variance[i] = noise;
        continue;
      }
      const double before = variance[i - 1] + walk_;
      const double gain = before / (before + noise);
      level[i] = level[i - 1] + gain * (values_[first + i] - level[i - 1]);
      variance[i] = (1 - gain) * before;
    }
    for (std::size_t i = count - 1; i-- > 0;) {
      const double gain = variance[i] / (variance[i] + walk_);
      level[i] += gain * (level[i + 1] - level[i]);
    }
    std::copy(level.begin(), level.end(), values_.begin() + static_cast<std::ptrdiff_t>(first));
  }

  const Track& track_;
  std::vector<double>& values_;
  const std::vector<int>& jumps_;
  double noise_ = 0;
  double walk_ = 0;
};

}  // namespace

Drift settle_drift(const std::vector<FrameObservation>& frames, const DriftSettings& settings) {
  Track track;
  for (const auto& frame : frames) {
    track.x.push_back(frame.shift_x_px);
    track.y.push_back(frame.shift_y_px);
    track.se.push_back(frame.shift_se_px > 0 ? frame.shift_se_px : usual_se_px);
    track.known.push_back(frame.usable && frame.shift_quality > least_quality);
  }
  Drift drift;
  if (std::none_of(track.known.begin(), track.known.end(), [](bool one) { return one; })) {
    drift.x_px.assign(frames.size(), 0);
    drift.y_px.assign(frames.size(), 0);
    return drift;
  }
  fill_gaps(track);
  const double step = usual_step(track);
  drop_outliers(track, std::max(unusual_steps * step, settings.jump_px / 4));
  fill_gaps(track);
  drift.jumps = find_jumps(track, std::max(unusual_steps * step, settings.jump_px));
  drift.x_px = track.x;
  drift.y_px = track.y;
  LevelSmoother(track, drift.x_px, drift.jumps).run();
  LevelSmoother(track, drift.y_px, drift.jumps).run();
  return drift;
}

double farthest_px(const Drift& drift) {
  double farthest = 0;
  for (std::size_t i = 0; i < drift.x_px.size(); ++i)
    farthest = std::max(farthest,
                        std::hypot(drift.x_px[i] - drift.x_px[0], drift.y_px[i] - drift.y_px[0]));
  return farthest;
}

}  // namespace wavefount::tube
