#include "wavefount/kinetics/dispersion.h"

#include <algorithm>
#include <cmath>

namespace wavefount {

namespace {

// Fits whose ratio lies among the highest tenth are those with a wrong model (merging nuclei,
// debris): they would widen everybody's errors.
constexpr double trimmed_share = 0.1;
// Beyond this a first-order autoregression says nothing any more.
constexpr double highest_correlation = 0.9;
// A fit that takes more than half of the residuals' variance leaves nothing to estimate from.
constexpr double highest_taken_share = 0.5;
// A shorter series tells the correlation of its errors from its model's shape no more.
constexpr std::size_t fewest_in_series = 8;
// From fewer residuals a correlation would be mostly noise.
constexpr double fewest_residuals = 30;
// The pooled ratio counts as much as this many degrees of freedom of a fit's own.
constexpr double pooled_freedom = 10;

struct OneFit {
  double ratio = 0;
  double freedom = 0;
};

double trimmed_ratio(std::vector<OneFit> fits) {
  std::sort(fits.begin(), fits.end(),
            [](const OneFit& a, const OneFit& b) { return a.ratio < b.ratio; });
  const auto kept =
      fits.size() - static_cast<std::size_t>(trimmed_share * static_cast<double>(fits.size()));
  double squares = 0, freedom = 0;
  for (std::size_t i = 0; i < kept; ++i) {
    squares += fits[i].ratio * fits[i].freedom;
    freedom += fits[i].freedom;
  }
  return freedom > 0 ? squares / freedom : 1;
}

// What is summed over the fits for their serial correlation.
struct Serial {
  double products = 0;    // of neighbours, each fit scaled to unit variance
  double count = 0;       // residuals
  double pairs = 0;       // of neighbours
  double parameters = 0;  // fitted
  double leverage = 0;    // between neighbours
};

void add_serial(const FitResiduals& fit, double squares, Serial& serial) {
  const auto& r = fit.residuals;
  const double n = static_cast<double>(r.size());
  for (std::size_t i = 0; i + 1 < r.size(); ++i) serial.products += r[i] * r[i + 1] / squares * n;
  serial.count += n;
  serial.pairs += n - 1;
  serial.parameters += fit.parameters;
  serial.leverage += fit.neighbour_leverage;
}

// A smooth fit takes the slow part of the residuals: (1 + ρ)/(1 − ρ) times what it takes of
// uncorrelated ones, which its hat matrix tells. Solved for ρ by iteration.
void correct_for_fit(const Serial& serial, Dispersion& pooled) {
  const double share = serial.parameters / serial.count;
  double factor = 1;
  for (int round = 0; round < 50; ++round) {
    const double left = 1 - std::min(highest_taken_share, factor * share);
    pooled.correlation =
        std::clamp((serial.products * left + factor * serial.leverage) / serial.pairs, 0.0,
                   highest_correlation);
    factor = (1 + pooled.correlation) / (1 - pooled.correlation);
    pooled.correlation_factor = factor * std::max(1.0, (1 - share) / left);
  }
}

}  // namespace

Dispersion pool_dispersion(const std::vector<FitResiduals>& fits) {
  std::vector<OneFit> ratios;
  Serial serial;
  for (const auto& fit : fits) {
    const double freedom = static_cast<double>(fit.residuals.size()) - fit.parameters;
    if (freedom <= 0) continue;
    double squares = 0;
    for (const double value : fit.residuals) squares += value * value;
    ratios.push_back({squares / freedom, freedom});
    if (squares > 0 && fit.residuals.size() >= fewest_in_series) add_serial(fit, squares, serial);
  }
  Dispersion pooled;
  if (!ratios.empty()) pooled.variance_ratio = trimmed_ratio(ratios);
  if (serial.count >= fewest_residuals) correct_for_fit(serial, pooled);
  return pooled;
}

ShrunkDispersion shrink_dispersion(double sum_of_squares, int freedom, const Dispersion& pooled) {
  const double own = std::max(0, freedom);
  ShrunkDispersion shrunk;
  shrunk.freedom = own + pooled_freedom;
  shrunk.variance_ratio =
      (sum_of_squares + pooled_freedom * pooled.variance_ratio) / shrunk.freedom;
  return shrunk;
}

double student_factor(double freedom) {
  const double z = 1.959964, n = std::max(freedom, 2.0);
  const double z3 = z * z * z, z5 = z3 * z * z, z7 = z5 * z * z;
  return (z + (z3 + z) / (4 * n) + (5 * z5 + 16 * z3 + 3 * z) / (96 * n * n) +
          (3 * z7 + 19 * z5 + 17 * z3 - 15 * z) / (384 * n * n * n)) /
         z;
}

}  // namespace wavefount
