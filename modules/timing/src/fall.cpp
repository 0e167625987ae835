#include "wavefount/timing/fall.h"

#include <Eigen/Dense>
#include <algorithm>
#include <cmath>

namespace wavefount {

namespace {

enum Column { level_column, slope_column, bend_column, base_column, drift_column, columns };
using Row = Eigen::Matrix<double, columns, 1>;
using Normal = Eigen::Matrix<double, columns, columns>;

// Priors, as standard deviations: of the slope in level/age and of the bend in level/age², twice
// what a filling curve can reach, since nuclei do not fill by the book; of the base in levels; of
// its drift in levels over the window, since neighbours release as well.
constexpr double slope_prior = 1;
constexpr double bend_prior = 0.6;
constexpr double base_prior = 0.3;
constexpr double drift_prior = 0.1;

// Likelihoods this far below the best no longer matter.
constexpr double negligible_misfit = 20;
constexpr int coarse_points = 32;
constexpr int fine_points = 30;
// A likelihood resolved by fewer points than this is looked at again, closer.
constexpr int enough_points = 14;
constexpr int zooms = 6;

// Mean over the exposure of the model's columns, the onset at time zero. `from`: start of exposure.
Row columns_at(double from, double exposure, const ReleaseCurve& curve) {
  const double to = from + exposure, middle = from + 0.5 * exposure;
  Row row;
  const double share = exposure > 0 ? curve.mean(from, to) : curve.at(from);
  row[level_column] = share;
  row[base_column] = 1 - share;
  if (to <= 0) {
    row[slope_column] = middle;
    row[bend_column] = middle * middle;
    row[drift_column] = 0;
  } else if (from >= 0) {
    row[slope_column] = 0;
    row[bend_column] = 0;
    row[drift_column] = middle * (1 - share);
  } else {  // the onset lies within the exposure
    row[slope_column] = -0.5 * from * from / exposure;
    row[bend_column] = -from * from * from / (3 * exposure);
    row[drift_column] = 0;
  }
  return row;
}

Row prior_precision(const FallWindow& window) {
  const double level = std::max(std::abs(window.level), 1e-9);
  const double age = std::max(window.age_min, 3 * window.interval_min);
  const double length = window.samples.back().time_min - window.samples.front().time_min;
  Row sd;
  sd[level_column] = INFINITY;
  sd[slope_column] = slope_prior * level / age;
  sd[bend_column] = bend_prior * level / (age * age);
  sd[base_column] = base_prior * level;
  sd[drift_column] = drift_prior * level / std::max(length, 1e-9);
  return sd.cwiseProduct(sd).cwiseInverse();
}

struct Solved {
  Row solution;
  Normal data;  // the samples' part of the normal matrix
  Eigen::LLT<Normal> factor;
  double misfit = 0;
};

Solved solve(const FallWindow& window, const ReleaseCurve& curve, double onset, const Row& prior) {
  Solved solved;
  solved.data.setZero();
  Row right = Row::Zero();
  double squares = 0;
  for (const auto& sample : window.samples) {
    const Row row = columns_at(sample.time_min - onset, window.exposure_min, curve);
    const double weight = 1 / sample.variance;
    const Row weighted = weight * row;
    // Most columns are zero on either side of the onset; the lower half is enough.
    for (int j = 0; j < columns; ++j) {
      if (weighted[j] == 0) continue;
      for (int i = j; i < columns; ++i) solved.data(i, j) += row[i] * weighted[j];
    }
    right += sample.signal * weighted;
    squares += weight * sample.signal * sample.signal;
  }
  solved.data.triangularView<Eigen::StrictlyUpper>() = solved.data.transpose();
  right[base_column] += prior[base_column] * window.base;
  squares += prior[base_column] * window.base * window.base;
  Normal normal = solved.data;
  normal.diagonal() += prior;
  solved.factor.compute(normal);
  solved.solution = solved.factor.solve(right);
  solved.misfit = squares - solved.solution.dot(right);
  return solved;
}

std::vector<double> spaced(double from, double to, int count) {
  std::vector<double> grid(count);
  for (int i = 0; i < count; ++i) grid[i] = from + (to - from) * i / (count - 1);
  return grid;
}

// First and last grid point whose likelihood still matters, one further at either side.
std::pair<std::size_t, std::size_t> support(const OnsetLikelihood& likelihood) {
  const auto& values = likelihood.log_likelihood;
  const double limit = *std::max_element(values.begin(), values.end()) - 0.5 * negligible_misfit;
  std::size_t first = 0, last = values.size() - 1;
  while (values[first] < limit) ++first;
  while (values[last] < limit) --last;
  return {first > 0 ? first - 1 : 0, std::min(last + 1, values.size() - 1)};
}

}  // namespace

OnsetFit fit_onset(const FallWindow& window, const ReleaseCurve& curve, double onset_min) {
  const auto solved = solve(window, curve, onset_min, prior_precision(window));
  OnsetFit fit;
  fit.misfit = solved.misfit;
  fit.level = solved.solution[level_column];
  fit.base = solved.solution[base_column];
  fit.log_det = 2 * solved.factor.matrixLLT().diagonal().array().log().sum();
  fit.leverage = solved.factor.solve(solved.data).trace();
  return fit;
}

std::vector<double> onset_residuals(const FallWindow& window, const ReleaseCurve& curve,
                                    double onset_min) {
  const auto solved = solve(window, curve, onset_min, prior_precision(window));
  std::vector<double> residuals;
  for (const auto& sample : window.samples) {
    const Row row = columns_at(sample.time_min - onset_min, window.exposure_min, curve);
    residuals.push_back((sample.signal - row.dot(solved.solution)) / std::sqrt(sample.variance));
  }
  return residuals;
}

OnsetLikelihood onset_likelihood(const FallWindow& window, const ReleaseCurve& curve,
                                 const std::vector<double>& grid_min) {
  OnsetLikelihood likelihood;
  likelihood.onset_min = grid_min;
  likelihood.least_misfit = INFINITY;
  const Row prior = prior_precision(window);
  for (const double onset : grid_min) {
    const auto solved = solve(window, curve, onset, prior);
    const double log_det = 2 * solved.factor.matrixLLT().diagonal().array().log().sum();
    likelihood.log_likelihood.push_back(-0.5 * (solved.misfit + log_det));
    if (solved.misfit < likelihood.least_misfit) {
      likelihood.least_misfit = solved.misfit;
      likelihood.best_min = onset;
    }
  }
  return likelihood;
}

OnsetLikelihood onset_likelihood(const FallWindow& window, const ReleaseCurve& curve) {
  auto likelihood = onset_likelihood(window, curve,
                                     spaced(window.earliest_min, window.latest_min, coarse_points));
  for (int zoom = 0; zoom < zooms; ++zoom) {
    const auto [first, last] = support(likelihood);
    if (zoom > 0 && last - first >= enough_points) break;
    likelihood = onset_likelihood(
        window, curve,
        spaced(likelihood.onset_min[first], likelihood.onset_min[last], fine_points));
  }
  return likelihood;
}

double OnsetLikelihood::log_evidence() const {
  const double highest = *std::max_element(log_likelihood.begin(), log_likelihood.end());
  double sum = 0;
  for (const double value : log_likelihood) sum += std::exp(value - highest);
  const double step = onset_min.size() > 1 ? onset_min[1] - onset_min[0] : 1;
  return highest + std::log(sum * step);
}

ReleaseCurve curve_for(const FallWindow& window, const ReleaseShape& shape,
                       const Surroundings& surroundings) {
  const double length =
      window.samples.back().time_min + window.exposure_min - window.earliest_min + 1e-3;
  // Fine against the frame interval, which the errors are measured in, within a bounded table.
  const double step = std::clamp(length / 600, window.interval_min / 100, window.interval_min / 16);
  return {shape, surroundings, window.radius_um, length, step};
}

}  // namespace wavefount
