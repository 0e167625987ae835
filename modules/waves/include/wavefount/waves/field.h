#pragma once

#include <Eigen/Core>
#include <vector>

#include "wavefount/waves/arrivals.h"
#include "wavefount/waves/counter_random.h"

namespace wavefount {

/// Scales of a smooth random arrival field.
struct FieldScale {
  double jitter_min = 0;           ///< of the nuclei around the field, standard deviation
  double gradient_min_per_um = 0;  ///< standard deviation of the field's slope about its trend
  double length_um = 0;            ///< over which the slope changes
};

struct WeightedScale {
  FieldScale scale;
  double weight = 0;
};

/// Covariance of a wave's field at a given jitter: linear trend (flat prior) + Gaussian process
/// (Matérn 3/2) + jitter + error, by restricted likelihood (Patterson & Thompson 1971) on a grid.
/// Weights sum to 1, largest first. Arrivals astray take no part.
std::vector<WeightedScale> fit_scales(const Arrivals& arrivals, const std::vector<char>& astray,
                                      double jitter_min, double spacing_um);

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

/// Share of random smooth fields with the wave's scales whose minimum lies at each arrival.
std::vector<double> chance_of_first(const Arrivals& arrivals,
                                    const std::vector<WeightedScale>& scales,
                                    double trend_sd_min_per_um, int draws, std::uint64_t seed);

}  // namespace wavefount
