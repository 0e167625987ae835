#include "wavefount/kinetics/filling.h"

#include <algorithm>
#include <cmath>
#include <numeric>

#include "wavefount/core/robust.h"
#include "wavefount/kinetics/least_squares.h"

namespace wavefount {

namespace {

constexpr int fewest_points = 5;
constexpr int fewest_points_curved = 6;
// One good point in 150,000 lies further out, a bad frame nearly always does.
constexpr double outlier_sigma = 4.5;
constexpr double highest_outlier_share = 0.2;
constexpr int rejection_rounds = 5;
constexpr int rate_starts = 24;

using Points = std::vector<FillingPoint>;

// A fitted function of time with what is needed to compare it.
struct Candidate {
  bool curved = false;
  double plateau = 0, rate = 0, formed = 0;  // of the curve
  double slope = 0, level = 0;               // of the line, at the first point
  double rate_variance = 0, initial_variance = 0;
  double sum_of_squares = 0;
  int parameters() const { return curved ? 3 : 2; }

  double at(double time, double start) const {
    if (curved) return plateau * -std::expm1(-rate * (time - formed));
    return level + slope * (time - start);
  }
};

// Sums of a weighted regression of y on one regressor and a constant.
struct LineFit {
  double constant = 0, slope = 0, slope_variance = 0, sum_of_squares = 0;
  bool regular = false;
};

template <class Regressor>
LineFit weighted_line(const Points& points, const Regressor& regressor) {
  double s = 0, sx = 0, sy = 0;
  for (const auto& p : points) {
    s += 1 / p.variance;
    sx += regressor(p.time_min) / p.variance;
    sy += p.brightness / p.variance;
  }
  const double mx = sx / s, my = sy / s;
  double sxx = 0, sxy = 0;
  for (const auto& p : points) {
    const double dx = regressor(p.time_min) - mx;
    sxx += dx * dx / p.variance;
    sxy += dx * (p.brightness - my) / p.variance;
  }
  LineFit fit;
  if (!(sxx > 0)) return fit;
  fit.regular = true;
  fit.slope = sxy / sxx;
  fit.constant = my - fit.slope * mx;
  fit.slope_variance = 1 / sxx;
  for (const auto& p : points) {
    const double r = p.brightness - fit.constant - fit.slope * regressor(p.time_min);
    fit.sum_of_squares += r * r / p.variance;
  }
  return fit;
}

std::optional<Candidate> fit_line(const Points& points) {
  const double start = points.front().time_min;
  const auto line = weighted_line(points, [start](double t) { return t - start; });
  if (!line.regular) return std::nullopt;
  Candidate candidate;
  candidate.slope = line.slope;
  candidate.level = line.constant;
  candidate.initial_variance = line.slope_variance;
  candidate.sum_of_squares = line.sum_of_squares;
  return candidate;
}

// For a given rate the curve is linear in exp(−rate t): the best of a range of rates is the start.
std::optional<std::vector<double>> curve_start(const Points& points) {
  const double start = points.front().time_min;
  const double span = points.back().time_min - start;
  std::optional<std::vector<double>> best;
  double least = 0;
  for (int i = 0; i < rate_starts; ++i) {
    const double rate = 0.05 * std::pow(2000.0, i / (rate_starts - 1.0)) / span;
    const auto fit = weighted_line(points, [&](double t) { return std::exp(-rate * (t - start)); });
    if (!fit.regular || fit.constant <= 0 || fit.slope >= 0) continue;
    if (best && fit.sum_of_squares >= least) continue;
    least = fit.sum_of_squares;
    best = {fit.constant, std::log(rate), start + std::log(-fit.slope / fit.constant) / rate};
  }
  return best;
}

// Parameters: plateau, log of the rate (so that it stays positive), time of formation.
LeastSquaresProblem curve_problem(const Points& points) {
  LeastSquaresProblem problem;
  problem.residual_count = static_cast<int>(points.size());
  problem.residuals = [&points](std::span<const double> p, std::span<double> residuals) {
    const double rate = std::exp(p[1]);
    for (std::size_t i = 0; i < points.size(); ++i) {
      const double model = p[0] * -std::expm1(-rate * (points[i].time_min - p[2]));
      residuals[i] = (model - points[i].brightness) / std::sqrt(points[i].variance);
    }
  };
  problem.jacobian = [&points](std::span<const double> p, std::span<double> jacobian) {
    const double rate = std::exp(p[1]);
    for (std::size_t i = 0; i < points.size(); ++i) {
      const double age = points[i].time_min - p[2];
      const double left = std::exp(-rate * age);
      const double weight = 1 / std::sqrt(points[i].variance);
      jacobian[3 * i] = (1 - left) * weight;
      jacobian[3 * i + 1] = p[0] * age * rate * left * weight;
      jacobian[3 * i + 2] = -p[0] * rate * left * weight;
    }
  };
  return problem;
}

std::optional<Candidate> fit_curve(const Points& points) {
  if (static_cast<int>(points.size()) < fewest_points_curved) return std::nullopt;
  const auto start = curve_start(points);
  if (!start) return std::nullopt;
  const auto fit = minimise_squares(curve_problem(points), *start);
  if (!fit.converged || fit.parameters[0] <= 0) return std::nullopt;
  Candidate candidate;
  candidate.curved = true;
  candidate.plateau = fit.parameters[0];
  candidate.rate = std::exp(fit.parameters[1]);
  candidate.formed = fit.parameters[2];
  candidate.sum_of_squares = fit.sum_of_squares;
  const double k = candidate.rate, plateau = candidate.plateau;
  candidate.rate_variance = k * k * fit.variance(1);
  candidate.initial_variance = k * k *
                               (fit.variance(0) + plateau * plateau * fit.variance(1) +
                                2 * plateau * fit.covariance_of(0, 1));
  if (!std::isfinite(candidate.rate_variance) || !std::isfinite(candidate.initial_variance))
    return std::nullopt;
  return candidate;
}

// Corrected Akaike criterion for normal errors of unknown variance.
double information(double sum_of_squares, int points, int parameters) {
  const double n = points, k = parameters + 1;
  if (n - k - 1 <= 0) return INFINITY;
  return n * std::log(std::max(sum_of_squares, 1e-300) / n) + 2 * k + 2 * k * (k + 1) / (n - k - 1);
}

std::optional<Candidate> fit_better(const Points& points) {
  const auto line = fit_line(points);
  const auto curve = fit_curve(points);
  if (!line || !curve) return line;
  const int n = static_cast<int>(points.size());
  const bool bends =
      information(curve->sum_of_squares, n, 3) < information(line->sum_of_squares, n, 2);
  return bends ? curve : line;
}

std::vector<double> standard_residuals(const Points& points, const Candidate& candidate,
                                       double start) {
  std::vector<double> residuals;
  residuals.reserve(points.size());
  for (const auto& p : points)
    residuals.push_back((p.brightness - candidate.at(p.time_min, start)) / std::sqrt(p.variance));
  return residuals;
}

Points within(const Points& points, const std::vector<double>& residuals) {
  const double limit = outlier_sigma * robust_sd(residuals);
  const double centre = median(residuals);
  Points kept;
  for (std::size_t i = 0; i < points.size(); ++i)
    if (std::abs(residuals[i] - centre) <= limit) kept.push_back(points[i]);
  const double left_out = static_cast<double>(points.size() - kept.size());
  if (left_out > highest_outlier_share * static_cast<double>(points.size())) return points;
  return kept;
}

bool usable(const FillingPoint& p) {
  return std::isfinite(p.time_min) && std::isfinite(p.brightness) && std::isfinite(p.variance) &&
         p.variance > 0;
}

// Derivatives of the model by its parameters at one point, over the point's standard deviation.
std::vector<double> sensitivities(const FillingPoint& p, const Candidate& candidate, double start) {
  const double weight = 1 / std::sqrt(p.variance);
  if (!candidate.curved) return {weight, weight * (p.time_min - start)};
  const double age = p.time_min - candidate.formed, left = std::exp(-candidate.rate * age);
  return {weight * (1 - left), weight * age * left, weight * left};
}

// Sum of the hat matrix's elements between neighbours, from an orthonormal basis (modified
// Gram–Schmidt) of the space that the fit spans.
double neighbour_leverage(const Points& points, const Candidate& candidate) {
  std::vector<std::vector<double>> basis(candidate.parameters());
  for (const auto& p : points) {
    const auto row = sensitivities(p, candidate, points.front().time_min);
    for (std::size_t j = 0; j < basis.size(); ++j) basis[j].push_back(row[j]);
  }
  double sum = 0;
  for (std::size_t j = 0; j < basis.size(); ++j) {
    auto& own = basis[j];
    for (std::size_t k = 0; k < j; ++k) {
      const double part = std::inner_product(own.begin(), own.end(), basis[k].begin(), 0.0);
      for (std::size_t i = 0; i < own.size(); ++i) own[i] -= part * basis[k][i];
    }
    const double norm = std::sqrt(std::inner_product(own.begin(), own.end(), own.begin(), 0.0));
    for (double& value : own) value = norm > 0 ? value / norm : 0;
    sum += std::inner_product(own.begin(), own.end() - 1, own.begin() + 1, 0.0);
  }
  return sum;
}

FillingFit described(const Candidate& candidate, const Points& points) {
  FillingFit fit;
  fit.curved = candidate.curved;
  fit.start_min = points.front().time_min;
  fit.level_at_start = candidate.at(fit.start_min, fit.start_min);
  fit.initial = candidate.curved ? candidate.plateau * candidate.rate : candidate.slope;
  fit.rate_per_min = candidate.rate;
  fit.plateau = candidate.plateau;
  fit.formed_min =
      candidate.curved ? candidate.formed : fit.start_min - candidate.level / candidate.slope;
  fit.rate_variance = candidate.rate_variance;
  fit.initial_variance = candidate.initial_variance;
  fit.sum_of_squares = candidate.sum_of_squares;
  fit.freedom = static_cast<int>(points.size()) - candidate.parameters();
  fit.residuals = {standard_residuals(points, candidate, fit.start_min), candidate.parameters(),
                   neighbour_leverage(points, candidate)};
  return fit;
}

}  // namespace

std::optional<FillingFit> fit_filling(const std::vector<FillingPoint>& points) {
  Points all;
  std::copy_if(points.begin(), points.end(), std::back_inserter(all), usable);
  if (static_cast<int>(all.size()) < fewest_points) return std::nullopt;
  Points used = all;
  std::optional<Candidate> candidate = fit_better(used);
  for (int round = 0; candidate && round < rejection_rounds; ++round) {
    const auto kept = within(all, standard_residuals(all, *candidate, used.front().time_min));
    if (kept.size() == used.size() || static_cast<int>(kept.size()) < fewest_points) break;
    used = kept;
    candidate = fit_better(used);
  }
  if (!candidate) return std::nullopt;
  auto fit = described(*candidate, used);
  if (!(fit.initial > 0) || !std::isfinite(fit.formed_min)) return std::nullopt;
  return fit;
}

}  // namespace wavefount
