#pragma once

#include <vector>

#include "wavefount/timing/fall.h"

namespace wavefount {

struct WeightedShape {
  ReleaseShape shape;
  double weight = 0;
};

/// What the falls of a film say together about the release.
struct PooledShape {
  std::vector<WeightedShape> shapes;  ///< weights sum to 1, most probable first
};

/// Posterior over diffusion, permeabilisation time and kind from at most `most_falls` of the
/// windows, those of the best signal to noise. Each fall's say is capped, so that a few odd ones
/// (a passing neighbour, a merged nucleus) cannot bend the shape. Without windows: the middle of
/// the physical range.
PooledShape pool_shape(const std::vector<FallWindow>& windows, const Surroundings& surroundings,
                       int most_falls);

/// The best of a coarse lattice of shapes by a dozen of the clearest falls; `windows` not empty.
ReleaseShape scout_shape(const std::vector<FallWindow>& windows, const Surroundings& surroundings);

}  // namespace wavefount
