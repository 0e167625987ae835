#pragma once

#include <vector>

#include "wavefount/timing/pooled_shape.h"

namespace wavefount {

/// When one fall began.
struct Onset {
  double time_min = 0;
  double se_min = 0;           ///< half-width of the 95 % interval / 1.96
  double half_loss_min = 0;    ///< time at which half of the fall is over
  double level = 0, base = 0;  ///< fitted, counts
  double drop_sigma = 0;       ///< (level − base) over the noise of one sample
};

/// Onsets of all falls of one film, same order as `windows`. Shape pooled over the film, averaged
/// over by its posterior weight; noise by the stated variances times the falls' own residual
/// dispersion. The time is the mean of the likelihood, which for falls shorter than the frame
/// interval is flat, not a parabola. `shape_falls`: most falls that the shape is learned from.
std::vector<Onset> time_falls(std::vector<FallWindow> windows, const Surroundings& surroundings,
                              int shape_falls);

}  // namespace wavefount
