#pragma once

#include <vector>

namespace wavefount::nuclei {

/// A robust mean and how many values it rests on.
struct LocalLevel {
  double mean = 0;
  int count = 0;
};

/// Mean of what lies within three standard deviations (from the lower quartile) of the median: near
/// the mean's efficiency for noise, deaf to a neighbour or a speck that reaches in. Reorders
/// `values`.
LocalLevel clipped_mean(std::vector<float>& values);

}  // namespace wavefount::nuclei
