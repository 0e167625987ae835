#include <algorithm>
#include <cmath>
#include <cstddef>

#include "wavefount/core/text.h"
#include "wavefount/tube/binning.h"
#include "wavefount/tube/frame_plan.h"
#include "wavefount/tube/scan_ahead.h"

namespace wavefount::tube {
namespace {

/// A frame with less light in the tube than this share of both keyframes around it is dark.
constexpr double dark_share = 0.2;
/// A frame of which more than this share of the tube is saturated shows nothing.
constexpr double most_saturated = 0.5;
/// Differences to more distant neighbours are the coarse detail that sharpness is measured by.
constexpr int coarse_px = 4;

/// Spans moved with the expected drift and cut to the image.
template <class Each>
void for_spans(const FramePlan& plan, const Image& image, int frame, Each&& each) {
  const auto expected = expected_shift(plan, frame);
  const int dx = static_cast<int>(std::lround(expected.x));
  const int dy = static_cast<int>(std::lround(expected.y));
  const int width = image_width(image);
  const int height = image_height(image);
  for (const auto& span : plan.inside) {
    const int y = span.y + dy;
    const int first = std::max(0, span.first + dx);
    const int last = std::min(width, span.last + dx);
    if (y >= 0 && y < height && first < last) each(y, first, last);
  }
}

/// Light inside the tubes, and how fine its detail is: squared differences between neighbours over
/// those between pixels `coarse_px` apart. Blur takes the first before the second.
void measure_light(const Image& reduced, int factor, const FramePlan& plan,
                   FrameObservation& observation) {
  const int width = image_width(reduced);
  const float* pixels = reduced.GetBufferPointer();
  double sum = 0;
  double count = 0;
  double fine = 0;
  double coarse = 0;
  for_spans(plan, reduced, observation.frame, [&](int y, int first, int last) {
    const float* row = pixels + static_cast<std::ptrdiff_t>(y) * width;
    float row_sum = 0;
    float row_fine = 0;
    float row_coarse = 0;
    for (int x = first; x < last; ++x) row_sum += row[x];
    for (int x = first; x + coarse_px < last; ++x) {
      const float near = row[x + 1] - row[x];
      const float far = row[x + coarse_px] - row[x];
      row_fine += near * near;
      row_coarse += far * far;
    }
    sum += row_sum;
    fine += row_fine;
    coarse += row_coarse;
    count += last - first;
  });
  observation.total_light = sum * factor * factor;
  observation.tube_pixels = count * factor * factor;
  observation.sharpness = coarse > 0 ? std::sqrt(fine / coarse) : 0;
}

/// Share of the tubes' full-size pixels at or above saturation. Only rows whose reduced pixels come
/// near it are looked at in full.
void measure_saturation(const Image& full, const Image& reduced, const ReducedFilm& film,
                        const FramePlan& plan, FrameObservation& observation) {
  const int factor = film.factor();
  const auto limit = static_cast<float>(plan.saturation_counts);
  // One saturated pixel among others at zero lifts the mean this far.
  const float suspicious = limit / static_cast<float>(factor * factor);
  const int full_width = image_width(full);
  const int width = image_width(reduced);
  long long saturated = 0;
  long long total = 0;
  for_spans(plan, reduced, observation.frame, [&](int y, int first, int last) {
    total += static_cast<long long>(last - first) * factor * factor;
    const float* row = reduced.GetBufferPointer() + static_cast<std::ptrdiff_t>(y) * width;
    float highest = row[first];
    for (int x = first; x < last; ++x) highest = std::max(highest, row[x]);
    if (highest < suspicious) return;
    for (int k = 0; k < factor; ++k) {
      const float* line = full.GetBufferPointer() +
                          static_cast<std::ptrdiff_t>(film.top() + y * factor + k) * full_width +
                          film.left() + first * factor;
      int here = 0;
      const int length = (last - first) * factor;
      for (int x = 0; x < length; ++x) here += line[x] >= limit ? 1 : 0;
      saturated += here;
    }
  });
  observation.saturated_share =
      total > 0 ? static_cast<double>(saturated) / static_cast<double>(total) : 0;
}

void refuse(FrameObservation& observation, const std::string& why) {
  if (observation.usable) observation.problem = why;
  observation.usable = false;
}

void judge_light(const FramePlan& plan, FrameObservation& observation) {
  if (observation.saturated_share > most_saturated)
    return refuse(observation, rounded_text(100 * observation.saturated_share, 2) +
                                   " % of the tube is saturated.");
  if (plan.key_light.empty() || observation.tube_pixels <= 0) return;
  const auto expected = expected_shift(plan, observation.frame);
  const double usual =
      std::min(plan.key_light[expected.before], plan.key_light[expected.after]) - plan.dark_counts;
  const double light = observation.total_light / observation.tube_pixels - plan.dark_counts;
  if (usual > 0 && light < dark_share * usual)
    refuse(observation, "The frame is dark beside the others.");
}

}  // namespace

ImagePointer reduce_frame(Image& pixels, const ReducedFilm& film, const FramePlan& plan,
                          FrameObservation& observation) {
  auto reduced = make_image(film.width(), film.height());
  bin_mean(pixels, film.factor(), film.left(), film.top(), *reduced);
  const auto problem = blank_problem(*reduced);
  if (!problem.empty()) refuse(observation, problem);
  if (mend(*reduced)) mend(pixels);
  measure_light(*reduced, film.factor(), plan, observation);
  measure_saturation(pixels, *reduced, film, plan, observation);
  if (observation.usable) judge_light(plan, observation);
  return reduced;
}

}  // namespace wavefount::tube
