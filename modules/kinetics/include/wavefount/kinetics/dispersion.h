#pragma once

#include <vector>

namespace wavefount {

/// Residuals of one fit, each divided by its stated standard deviation, in the order of time.
struct FitResiduals {
  std::vector<double> residuals;
  int parameters = 0;
  double neighbour_leverage = 0;  ///< sum of the hat matrix's elements beside its diagonal
};

/// How much more the data scatter than their stated variances say, over many fits of one film.
struct Dispersion {
  double variance_ratio = 1;  ///< residual variance over stated variance, pooled
  double correlation = 0;     ///< of neighbouring residuals, 0 to 0.9, corrected for the fit
  /// Factor on the variance of a smooth fit's parameters from serial correlation (first-order
  /// autoregression; Bayley & Hammersley 1946), with what the fit itself took of the residuals'
  /// slow part given back.
  double correlation_factor = 1;
};

/// Pools the fits: trimmed mean of variance ratios, and the mean lag-one correlation. Without any
/// freedom the stated variances stand.
Dispersion pool_dispersion(const std::vector<FitResiduals>& fits);

/// One fit's own variance ratio, drawn towards the pooled one, and the freedom that it then has.
struct ShrunkDispersion {
  double variance_ratio = 1;
  double freedom = 1;
};
ShrunkDispersion shrink_dispersion(double sum_of_squares, int freedom, const Dispersion& pooled);

/// 97.5 % point of Student's t over that of the normal law: on a standard error it makes
/// ± 1.96 standard errors a 95 % interval at few degrees of freedom (Cornish & Fisher 1938).
double student_factor(double freedom);

}  // namespace wavefount
