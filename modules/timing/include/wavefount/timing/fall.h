#pragma once

#include <vector>

#include "wavefount/timing/release.h"

namespace wavefount {

/// One measurement of the aperture.
struct ApertureSample {
  double time_min = 0;  ///< start of the exposure
  double signal = 0;    ///< counts
  double variance = 0;  ///< counts²
};

/// The stretch of an aperture trace around one fall, and what is known before the fit.
struct FallWindow {
  std::vector<ApertureSample> samples;      ///< by time
  double exposure_min = 0;                  ///< 0: short against the frame interval
  double interval_min = 0;                  ///< typical step of samples
  double radius_um = 0;                     ///< of the aperture
  double earliest_min = 0, latest_min = 0;  ///< between which the onset lies
  double age_min = 0;                       ///< of the nucleus at the fall
  double level = 0;                         ///< before the fall, counts
  double base = 0;                          ///< after it, counts
};

/// The linear part of the model at one onset: before the onset level + slope · t + bend · t², after
/// it base + drift · t + (level − base − …) · share, t since the onset.
struct OnsetFit {
  double misfit = 0;   ///< chi-square, priors included
  double log_det = 0;  ///< of the normal matrix
  double level = 0, base = 0;
  double leverage = 0;  ///< effective number of fitted parameters, without the onset
};

/// Variable projection (Golub & Pereyra 1973): the best linear part for a given onset. Weak priors
/// hold what the samples do not: a filling curve of the nucleus' age can rise at most by level/age
/// and bend by 0.27 level/age².
OnsetFit fit_onset(const FallWindow& window, const ReleaseCurve& curve, double onset_min);
/// Residuals of that fit over their standard deviations.
std::vector<double> onset_residuals(const FallWindow& window, const ReleaseCurve& curve,
                                    double onset_min);

/// Likelihood of the onset, the linear part integrated out, on a grid fine enough for it.
struct OnsetLikelihood {
  std::vector<double> onset_min;       ///< equally spaced
  std::vector<double> log_likelihood;  ///< up to a constant of the window
  double best_min = 0;                 ///< of least misfit
  double least_misfit = 0;

  /// Log of the integral over the onset.
  double log_evidence() const;
};
OnsetLikelihood onset_likelihood(const FallWindow& window, const ReleaseCurve& curve);
/// The same on a given grid.
OnsetLikelihood onset_likelihood(const FallWindow& window, const ReleaseCurve& curve,
                                 const std::vector<double>& grid_min);

/// The curve of one shape for one window.
ReleaseCurve curve_for(const FallWindow& window, const ReleaseShape& shape,
                       const Surroundings& surroundings);

}  // namespace wavefount
