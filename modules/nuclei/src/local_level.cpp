#include "wavefount/nuclei/local_level.h"

#include <algorithm>
#include <cmath>

namespace wavefount::nuclei {
namespace {

float middle_of(std::vector<float>& values) {
  const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
  std::nth_element(values.begin(), middle, values.end());
  return *middle;
}

}  // namespace

LocalLevel clipped_mean(std::vector<float>& values) {
  if (values.empty()) return {};
  const float centre = middle_of(values);
  std::vector<float> apart;
  apart.reserve(values.size());
  double whole = 0;
  for (const float value : values) {
    apart.push_back(std::abs(value - centre));
    whole += static_cast<double>(apart.back());
  }
  // Where most whole-numbered pixels of a dim camera are equal, the median deviation is zero.
  const double mean_apart = whole / static_cast<double>(values.size());
  const double spread = std::max(1.4826 * static_cast<double>(middle_of(apart)), 0.5 * mean_apart);
  const double limit = 3 * spread;
  double sum = 0;
  int count = 0;
  for (const float value : values) {
    if (std::abs(static_cast<double>(value) - centre) > limit) continue;
    sum += static_cast<double>(value);
    ++count;
  }
  return {sum / count, count};
}

}  // namespace wavefount::nuclei
