#include "wavefount/nuclei/local_level.h"

#include <algorithm>
#include <cmath>

namespace wavefount::nuclei {
namespace {

/// The value that `share` of the values lie below; only the first `count` of them are looked at,
/// and reordered.
double ranked(std::vector<float>& values, std::size_t count, double share) {
  const auto at = static_cast<std::ptrdiff_t>(share * static_cast<double>(count));
  std::nth_element(values.begin(), values.begin() + at,
                   values.begin() + static_cast<std::ptrdiff_t>(count));
  return static_cast<double>(values[static_cast<std::size_t>(at)]);
}

double mean_distance(const std::vector<float>& values, double centre) {
  double sum = 0;
  for (const float value : values) sum += std::abs(static_cast<double>(value) - centre);
  return sum / static_cast<double>(values.size());
}

}  // namespace

LocalLevel clipped_mean(std::vector<float>& values) {
  if (values.empty()) return {};
  const double centre = ranked(values, values.size(), 0.5);
  // What reaches in is brighter, so the spread is taken from the darker half, whose own middle is
  // the lower quartile.
  const double quartile = ranked(values, std::max<std::size_t>(values.size() / 2, 1), 0.5);
  double spread = (centre - quartile) / 0.6745;
  // Where most whole-numbered pixels of a dim camera are equal, the quartile is the median.
  if (spread <= 0) spread = mean_distance(values, centre);
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
