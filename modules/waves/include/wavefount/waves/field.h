#pragma once

#include <Eigen/Core>
#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/waves/counter_random.h"

namespace wavefount {

/// The entries of one wave as the arrival field sees them. Places are straightened: x along the
/// tube, y across, µm.
struct Arrivals {
  std::vector<Point> places_um;
  std::vector<double> times_min, se_min;
  bool plane = false;  ///< the trend has a slope across too
};

/// Scales of arrival field and jitter.
struct FieldScale {
  double jitter_min = 0;           ///< of the nuclei around the field, standard deviation
  double gradient_min_per_um = 0;  ///< standard deviation of the field's slope about its trend
  double length_um = 0;            ///< over which the slope changes
};

struct WeightedScale {
  FieldScale scale;
  double weight = 0;
};

/// What the entries of one wave say about the scales.
struct FieldFit {
  std::vector<WeightedScale> scales;  ///< posterior, weights sum to 1, largest first
  std::vector<char> astray;           ///< by arrival: not of this field, left out of it
  double jitter_min = 0;              ///< posterior mean
};

/// Arrival time = linear trend (flat prior) + Gaussian process (Matérn 3/2 covariance) + jitter +
/// measurement error. The scales of every wave by restricted likelihood (Patterson & Thompson 1971)
/// on a grid; the jitter is pooled over the waves: each wave's own is log-normal around the
/// common one. Entries that the field from all the others makes less likely than a stray at
/// any time within `period_min` are set aside.
std::vector<FieldFit> fit_fields(const std::vector<Arrivals>& waves, double spacing_um,
                                 double period_min);

/// Posterior of the field at chosen places, for one set of scales (universal kriging: Stein 1999).
class FieldPosterior {
 public:
  FieldPosterior(const Arrivals& arrivals, const std::vector<char>& astray, const FieldScale& scale,
                 const std::vector<Point>& places_um);
  const Eigen::VectorXd& mean_min() const { return mean_; }
  /// Posterior standard deviation at each place.
  Eigen::VectorXd se_min() const;
  /// One whole field; the same stream gives the same field.
  Eigen::VectorXd draw(const CounterRandom& random, std::uint64_t stream) const;

 private:
  Eigen::VectorXd mean_;
  Eigen::MatrixXd root_;  ///< lower triangle; root · rootᵀ is the covariance
};

/// Prediction of each arrival from all the others: residual and its standard deviation (jitter and
/// error included), averaged over the fit's scales. Those astray are predicted too.
struct LeftOut {
  double residual_min = 0, sd_min = 0;
};
std::vector<LeftOut> leave_one_out(const Arrivals& arrivals, const FieldFit& fit);

/// Restricted log likelihood of the arrivals under the scales, up to a constant.
double restricted_likelihood(const Arrivals& arrivals, const FieldScale& scale);

/// Random smooth fields of the given scales and slope of the trend, without any data.
class FieldPrior {
 public:
  FieldPrior(const std::vector<Point>& places_um, const FieldScale& scale,
             double trend_sd_min_per_um);
  Eigen::VectorXd draw(const CounterRandom& random, std::uint64_t stream) const;

 private:
  Eigen::MatrixXd root_;
};

}  // namespace wavefount
