#pragma once

#include <string>
#include <vector>

#include "wavefount/core/observations.h"

namespace wavefount::tube {

struct DriftSettings {
  double jump_px = 5;  ///< full-size pixels; a larger step between two frames can be a jump
};

/// Shift of each frame, checked and smoothed: frames not usable and isolated outliers are filled in
/// from their neighbours; jumps stay sharp; the rest is a random walk seen with the registration's
/// noise, smoothed by Kalman's filter and the Rauch-Tung-Striebel smoother (1965), with the noise
/// taken from the steps themselves and never more than the registration claims. The first usable
/// frame keeps its shift against the reference.
Drift settle_drift(const std::vector<FrameObservation>& frames, const DriftSettings& settings);

/// Range of the drift, full-size pixels: the largest distance of any frame from the first.
double farthest_px(const Drift& drift);

}  // namespace wavefount::tube
