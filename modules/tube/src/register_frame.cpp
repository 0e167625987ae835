#include <algorithm>
#include <cmath>

#include "wavefount/tube/frame_plan.h"

namespace wavefount::tube {
namespace {

/// A frame that agrees less than keyframes do, by this margin, may have jumped.
constexpr double jump_margin = 0.15;

struct Along {
  double change = 0;  ///< against the expected shift, along the blind direction
  double weight = 0;
};

Along against_key(const MovingImage& moving, const FramePlan& plan, std::size_t key, double share,
                  const ExpectedShift& expected, double direction_x, double direction_y) {
  const double prior_x = expected.x - plan.key_x[key];
  const double prior_y = expected.y - plan.key_y[key];
  const auto shift = plan.keys[key].find(moving, prior_x, prior_y, false);
  if (shift.blind_directions > 0) return {};
  return {(shift.x - prior_x) * direction_x + (shift.y - prior_y) * direction_y, share};
}

/// Along one direction, by the two nearest keyframes.
double by_keyframes(const MovingImage& moving, const FramePlan& plan, const ExpectedShift& expected,
                    double direction_x, double direction_y) {
  const auto after = against_key(moving, plan, expected.after, std::max(expected.after_share, 0.01),
                                 expected, direction_x, direction_y);
  const auto before =
      against_key(moving, plan, expected.before, std::max(1 - expected.after_share, 0.01), expected,
                  direction_x, direction_y);
  const double total = after.weight + before.weight;
  return total > 0 ? (after.weight * after.change + before.weight * before.change) / total : 0;
}

/// Against what stands still; after a jump from where the thumbnail without nuclei says.
Shift against_standing(const Image& reduced, const MovingImage& moving, const FramePlan& plan,
                       const ExpectedShift& expected) {
  const auto near = plan.standing->find(moving, expected.x, expected.y, false);
  if (near.agreement > plan.expected_agreement - jump_margin) return near;
  const auto thumb = opened_thumb(reduced, plan.blob_px);
  const auto coarse = plan.coarse->find(MovingImage(*thumb.image), expected.x / thumb.factor,
                                        expected.y / thumb.factor, true);
  const auto far =
      plan.standing->find(moving, coarse.x * thumb.factor, coarse.y * thumb.factor, false);
  return far.agreement > near.agreement ? far : near;
}

}  // namespace

void register_frame(const Image& reduced, const FramePlan& plan, int factor,
                    FrameObservation& observation) {
  const auto expected = expected_shift(plan, observation.frame);
  observation.shift_x_px = expected.x * factor;
  observation.shift_y_px = expected.y * factor;
  observation.shift_quality = 0;
  if (!observation.usable || !plan.standing || plan.keys.empty()) return;
  const MovingImage moving(reduced);
  auto shift = against_standing(reduced, moving, plan, expected);
  if (shift.blind_directions == 1) {
    const double change = by_keyframes(moving, plan, expected, shift.blind_x, shift.blind_y);
    shift.x += change * shift.blind_x;
    shift.y += change * shift.blind_y;
  } else if (shift.blind_directions == 2) {
    shift.x += by_keyframes(moving, plan, expected, 1, 0);
    shift.y += by_keyframes(moving, plan, expected, 0, 1);
  }
  observation.shift_x_px = shift.x * factor;
  observation.shift_y_px = shift.y * factor;
  observation.shift_quality = std::clamp(shift.agreement, 0.0, 1.0);
  observation.shift_se_px = std::min(shift.se * factor, 1e3);
}

}  // namespace wavefount::tube
