#pragma once

#include <vector>

namespace wavefount {

/// Median; 0 for an empty list. Takes a copy, since it reorders.
double median(std::vector<double> values);
/// Linear-interpolated quantile, 0 <= share <= 1; 0 for an empty list.
double quantile(std::vector<double> values, double share);
/// 1.4826 × median absolute deviation: the standard deviation for normal data (Hampel 1974).
double robust_sd(const std::vector<double>& values);

}  // namespace wavefount
