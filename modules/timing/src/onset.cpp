#include "wavefount/timing/onset.h"

#include <algorithm>
#include <cmath>

#include "wavefount/core/robust.h"
#include "wavefount/kinetics/dispersion.h"

namespace wavefount {

namespace {

constexpr double normal_95 = 1.959964;
constexpr double covered = 0.95;
// Points of the common grid that all shapes' likelihoods of one fall are averaged on.
constexpr int grid_points = 140;

// Noise against what was stated, from second differences before the fall: no model needed.
double difference_ratio(const FallWindow& window) {
  std::vector<double> ratios;
  const auto& s = window.samples;
  for (std::size_t i = 1; i + 1 < s.size() && s[i + 1].time_min < window.earliest_min; ++i) {
    const double second = s[i - 1].signal - 2 * s[i].signal + s[i + 1].signal;
    ratios.push_back(second / std::sqrt(s[i - 1].variance + 4 * s[i].variance + s[i + 1].variance));
  }
  if (ratios.size() < 3) return 0;
  return std::pow(1.4826 * quantile(
                               [&] {
                                 for (double& ratio : ratios) ratio = std::abs(ratio);
                                 return ratios;
                               }(),
                               0.5),
                  2);
}

void scale_variances(FallWindow& window, double ratio) {
  for (auto& sample : window.samples) sample.variance *= ratio;
}

void scale_by_differences(std::vector<FallWindow>& windows) {
  std::vector<double> ratios;
  for (const auto& window : windows)
    if (const double ratio = difference_ratio(window); ratio > 0) ratios.push_back(ratio);
  if (ratios.empty()) return;
  const double ratio = median(std::move(ratios));
  for (auto& window : windows) scale_variances(window, ratio);
}

// Each fall's variances times its own residual dispersion, drawn towards the film's.
void scale_by_residuals(std::vector<FallWindow>& windows, const ReleaseShape& shape,
                        const Surroundings& surroundings) {
  std::vector<FitResiduals> fits;
  std::vector<double> squares;
  for (const auto& window : windows) {
    const auto curve = curve_for(window, shape, surroundings);
    const double onset = onset_likelihood(window, curve).best_min;
    FitResiduals fit;
    fit.residuals = onset_residuals(window, curve, onset);
    fit.parameters = static_cast<int>(std::lround(fit_onset(window, curve, onset).leverage + 1));
    double sum = 0;
    for (const double residual : fit.residuals) sum += residual * residual;
    squares.push_back(sum);
    fits.push_back(std::move(fit));
  }
  const auto pooled = pool_dispersion(fits);
  for (std::size_t i = 0; i < windows.size(); ++i) {
    const int freedom = static_cast<int>(fits[i].residuals.size()) - fits[i].parameters;
    scale_variances(windows[i], shrink_dispersion(squares[i], freedom, pooled).variance_ratio);
  }
}

std::vector<double> common_grid(const std::vector<OnsetLikelihood>& likelihoods) {
  double from = INFINITY, to = -INFINITY;
  for (const auto& one : likelihoods) {
    from = std::min(from, one.onset_min.front());
    to = std::max(to, one.onset_min.back());
  }
  std::vector<double> grid(grid_points);
  for (int i = 0; i < grid_points; ++i) grid[i] = from + (to - from) * i / (grid_points - 1);
  return grid;
}

// Posterior mean, and the half-width around it that holds 95 %.
void summarise(const std::vector<double>& grid, std::vector<double> density, Onset& onset) {
  double sum = 0, first = 0;
  for (std::size_t i = 0; i < grid.size(); ++i) {
    sum += density[i];
    first += density[i] * grid[i];
  }
  onset.time_min = first / sum;
  std::vector<std::pair<double, double>> by_distance;
  for (std::size_t i = 0; i < grid.size(); ++i)
    by_distance.push_back({std::abs(grid[i] - onset.time_min), density[i] / sum});
  std::sort(by_distance.begin(), by_distance.end());
  double held = 0, half_width = 0;
  for (std::size_t i = 0; i < by_distance.size(); ++i) {
    const auto& [distance, mass] = by_distance[i];
    if (held + mass >= covered) {
      // Within one grid point's mass, linearly.
      const double before = i > 0 ? by_distance[i - 1].first : 0;
      half_width = before + (distance - before) * (covered - held) / mass;
      break;
    }
    held += mass;
  }
  onset.se_min = half_width / normal_95;
}

Onset time_fall(const FallWindow& window, const PooledShape& pooled,
                const Surroundings& surroundings) {
  std::vector<ReleaseCurve> curves;
  std::vector<OnsetLikelihood> coarse;
  for (const auto& [shape, weight] : pooled.shapes) {
    curves.push_back(curve_for(window, shape, surroundings));
    coarse.push_back(onset_likelihood(window, curves.back()));
  }
  const auto grid = common_grid(coarse);
  std::vector<double> density(grid.size(), 0.0);
  for (std::size_t s = 0; s < curves.size(); ++s) {
    const auto likelihood = onset_likelihood(window, curves[s], grid);
    // The shape's weight holds this fall's evidence already.
    const double evidence = likelihood.log_evidence();
    for (std::size_t i = 0; i < grid.size(); ++i)
      density[i] += pooled.shapes[s].weight * std::exp(likelihood.log_likelihood[i] - evidence);
  }
  Onset onset;
  summarise(grid, density, onset);
  const auto fit = fit_onset(window, curves.front(), onset.time_min);
  onset.level = fit.level;
  onset.base = fit.base;
  onset.half_loss_min = onset.time_min + curves.front().half_min();
  std::vector<double> variances;
  for (const auto& sample : window.samples) variances.push_back(sample.variance);
  onset.drop_sigma = (fit.level - fit.base) / std::sqrt(median(std::move(variances)));
  return onset;
}

}  // namespace

std::vector<Onset> time_falls(std::vector<FallWindow> windows, const Surroundings& surroundings,
                              int shape_falls) {
  if (windows.empty()) return {};
  scale_by_differences(windows);
  scale_by_residuals(windows, scout_shape(windows, surroundings), surroundings);
  const auto pooled = pool_shape(windows, surroundings, shape_falls);
  std::vector<Onset> onsets;
  for (const auto& window : windows) onsets.push_back(time_fall(window, pooled, surroundings));
  return onsets;
}

}  // namespace wavefount
