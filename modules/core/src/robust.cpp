#include "wavefount/core/robust.h"

#include <algorithm>
#include <cmath>

namespace wavefount {

double quantile(std::vector<double> values, double share) {
  if (values.empty()) return 0;
  const double at = std::clamp(share, 0.0, 1.0) * static_cast<double>(values.size() - 1);
  const auto below = static_cast<std::size_t>(at);
  const auto begin = values.begin();
  std::nth_element(begin, begin + static_cast<std::ptrdiff_t>(below), values.end());
  const double low = values[below];
  if (below + 1 == values.size()) return low;
  const double high =
      *std::min_element(begin + static_cast<std::ptrdiff_t>(below) + 1, values.end());
  return low + (at - static_cast<double>(below)) * (high - low);
}

double median(std::vector<double> values) {
  return quantile(std::move(values), 0.5);
}

double robust_sd(const std::vector<double>& values) {
  const double centre = median(values);
  std::vector<double> distances;
  distances.reserve(values.size());
  for (const double value : values) distances.push_back(std::abs(value - centre));
  return 1.4826 * median(std::move(distances));
}

}  // namespace wavefount
