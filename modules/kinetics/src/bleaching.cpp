#include "wavefount/kinetics/bleaching.h"

#include <algorithm>
#include <cmath>
#include <vector>

#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"

namespace wavefount {

namespace {

constexpr double smallest_decay = 0.02;  // below it the correction is smaller than its own error
constexpr std::size_t classes = 40;      // medians over time, against single bad frames
constexpr std::size_t fewest_frames = 20;
// The two halves of a film must agree within this factor for the fall to be a steady one.
constexpr double steadiness = 2.5;

struct Course {
  std::vector<double> time_min, log_light;
};

Course light_course(const Observations& observations, double dark_offset) {
  Course course;
  for (const auto& frame : observations.frames) {
    if (!frame.usable || !(frame.tube_pixels > 0)) continue;
    const double light = frame.total_light / frame.tube_pixels - dark_offset;
    if (!(light > 0) || !std::isfinite(light)) continue;
    course.time_min.push_back(frame.time_min);
    course.log_light.push_back(std::log(light));
  }
  return course;
}

Course medians_of(const Course& course) {
  const std::size_t n = course.time_min.size(), count = std::min(classes, n);
  Course result;
  for (std::size_t c = 0; c < count; ++c) {
    const auto from = static_cast<std::ptrdiff_t>(c * n / count);
    const auto to = static_cast<std::ptrdiff_t>((c + 1) * n / count);
    result.time_min.push_back(
        median({course.time_min.begin() + from, course.time_min.begin() + to}));
    result.log_light.push_back(
        median({course.log_light.begin() + from, course.log_light.begin() + to}));
  }
  return result;
}

double slope_between(const Course& course, std::size_t from, std::size_t to) {
  std::vector<double> slopes;
  for (std::size_t i = from; i < to; ++i)
    for (std::size_t j = i + 1; j < to; ++j)
      slopes.push_back((course.log_light[j] - course.log_light[i]) /
                       (course.time_min[j] - course.time_min[i]));
  return median(std::move(slopes));
}

bool closed(const Tube& tube) {
  return tube.measured && tube.left_end == Boundary::closed && tube.right_end == Boundary::closed &&
         tube.upper_wall == Boundary::closed && tube.lower_wall == Boundary::closed;
}

}  // namespace

double Bleaching::correction(double time_min) const {
  return std::exp(rate_per_min * time_min);
}

Bleaching estimate_bleaching(const Observations& observations, const Tube& tube,
                             const CameraModel& camera) {
  if (!closed(tube))
    return {0,
            "Bleaching was not corrected: the tube runs out of the view, so its total light can "
            "change for other reasons."};
  if (!camera.offset_given)
    return {0,
            "Bleaching was not corrected: it needs the camera's dark offset (dark_offset_counts in "
            "the sidecar)."};
  const auto course = light_course(observations, camera.dark_offset_counts);
  if (course.time_min.size() < fewest_frames)
    return {0, "Bleaching was not corrected: the film has too few usable frames."};
  const auto medians = medians_of(course);
  const std::size_t n = medians.time_min.size();
  const double rate = -slope_between(medians, 0, n);
  const double first = -slope_between(medians, 0, n / 2),
               second = -slope_between(medians, n / 2, n);
  const double decay = -std::expm1(-rate * (medians.time_min.back() - medians.time_min.front()));
  if (decay < smallest_decay)
    return {0, "Bleaching was not corrected: the tube's total light falls by less than 2 %."};
  if (first <= 0 || second <= 0 || std::max(first, second) > steadiness * std::min(first, second))
    return {0,
            "Bleaching was not corrected: the tube's total light does not fall steadily, so the "
            "fall is not bleaching alone."};
  return {rate, "Brightness was corrected for bleaching of " + rounded_text(100 * decay, 2) +
                    " % over the film, measured on the tube's total light."};
}

}  // namespace wavefount
