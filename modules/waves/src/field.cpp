#include "wavefount/waves/field.h"

#include <Eigen/Cholesky>
#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <numbers>

namespace wavefount {
namespace {

using Eigen::MatrixXd;
using Eigen::VectorXd;

double distance(Point a, Point b) {
  return std::hypot(a.x - b.x, a.y - b.y);
}

/// Matérn 3/2 (Stein 1999): once differentiable, so that fronts may bend sharply where they start
/// and where they meet.
double covariance(double distance_um, const FieldScale& scale) {
  const double reach = std::numbers::sqrt3 * distance_um / scale.length_um;
  const double sd = scale.gradient_min_per_um * scale.length_um / std::numbers::sqrt3;
  return sd * sd * (1 + reach) * std::exp(-reach);
}

MatrixXd covariances(const std::vector<Point>& rows, const std::vector<Point>& columns,
                     const FieldScale& scale) {
  MatrixXd matrix(rows.size(), columns.size());
  for (Eigen::Index j = 0; j < matrix.cols(); ++j)
    for (Eigen::Index i = 0; i < matrix.rows(); ++i)
      matrix(i, j) = covariance(distance(rows[i], columns[j]), scale);
  return matrix;
}

/// Columns of the trend: level, slope along, and across where asked for; in mm, to keep the
/// equations well scaled.
MatrixXd trend(const std::vector<Point>& places, bool plane) {
  MatrixXd columns(places.size(), plane ? 3 : 2);
  for (Eigen::Index i = 0; i < columns.rows(); ++i) {
    columns(i, 0) = 1;
    columns(i, 1) = places[i].x / 1000;
    if (plane) columns(i, 2) = places[i].y / 1000;
  }
  return columns;
}

VectorXd as_vector(const std::vector<double>& values) {
  return Eigen::Map<const VectorXd>(values.data(), static_cast<Eigen::Index>(values.size()));
}

/// The equations of one set of scales, solved.
struct Solved {
  Eigen::LLT<MatrixXd> total;  ///< covariance of the arrivals
  MatrixXd trend_columns;
  MatrixXd weighted_trend;  ///< V⁻¹ H
  Eigen::LLT<MatrixXd> trend_information;
  VectorXd trend_values;
  VectorXd weighted_residual;  ///< V⁻¹ (y − H β)
};

Solved solve(const Arrivals& arrivals, const FieldScale& scale) {
  Solved solved;
  MatrixXd total = covariances(arrivals.places_um, arrivals.places_um, scale);
  for (Eigen::Index i = 0; i < total.rows(); ++i)
    total(i, i) += scale.jitter_min * scale.jitter_min + arrivals.se_min[i] * arrivals.se_min[i];
  solved.total.compute(total);
  solved.trend_columns = trend(arrivals.places_um, arrivals.plane);
  solved.weighted_trend = solved.total.solve(solved.trend_columns);
  MatrixXd information = solved.trend_columns.transpose() * solved.weighted_trend;
  // Nuclei all at one place across the tube leave that slope open: hold it near zero.
  information.diagonal().array() += 1e-9;
  solved.trend_information.compute(information);
  const VectorXd times = as_vector(arrivals.times_min);
  solved.trend_values = solved.trend_information.solve(solved.weighted_trend.transpose() * times);
  solved.weighted_residual = solved.total.solve(times - solved.trend_columns * solved.trend_values);
  return solved;
}

double log_determinant(const Eigen::LLT<MatrixXd>& root) {
  return 2 * root.matrixL().toDenseMatrix().diagonal().array().log().sum();
}

double likelihood_of(const Arrivals& arrivals, const Solved& solved) {
  const VectorXd times = as_vector(arrivals.times_min);
  const double misfit =
      solved.weighted_residual.dot(times - solved.trend_columns * solved.trend_values);
  const auto free = static_cast<double>(times.size() - solved.trend_columns.cols());
  return -0.5 * (log_determinant(solved.total) + log_determinant(solved.trend_information) +
                 misfit + free * std::log(2 * std::numbers::pi));
}

Arrivals kept_of(const Arrivals& arrivals, const std::vector<char>& left_out) {
  Arrivals kept;
  kept.plane = arrivals.plane;
  for (std::size_t i = 0; i < arrivals.times_min.size(); ++i) {
    if (!left_out.empty() && left_out[i]) continue;
    kept.places_um.push_back(arrivals.places_um[i]);
    kept.times_min.push_back(arrivals.times_min[i]);
    kept.se_min.push_back(arrivals.se_min[i]);
  }
  return kept;
}

/// Every so many arrivals, for the scales of very large waves: the restricted likelihood costs n³.
Arrivals thinned(const Arrivals& arrivals) {
  constexpr std::size_t most = 120;
  const auto count = arrivals.times_min.size();
  if (count <= most) return arrivals;
  std::vector<char> left_out(count, 1);
  for (std::size_t i = 0; i < most; ++i) left_out[i * count / most] = 0;
  return kept_of(arrivals, left_out);
}

struct Grid {
  std::vector<double> jitters, gradients, lengths;
  std::size_t size() const { return jitters.size() * gradients.size() * lengths.size(); }
  FieldScale at(std::size_t i) const {
    const auto jitter = i % jitters.size();
    const auto gradient = i / jitters.size() % gradients.size();
    return {jitters[jitter], gradients[gradient], lengths[i / jitters.size() / gradients.size()]};
  }
};

std::vector<double> geometric(double from, double to, int count) {
  std::vector<double> values;
  for (int i = 0; i < count; ++i)
    values.push_back(from * std::pow(to / from, static_cast<double>(i) / (count - 1)));
  return values;
}

/// Jitter from below any timing error to a third of a period; slopes from ten times faster than
/// anything published (600 µm/min) to ten times slower than usual (2 µm/min); slopes that change
/// over a few nuclei up to the length of a tube.
Grid scale_grid(double spacing_um, bool fine) {
  Grid grid;
  grid.jitters = geometric(0.03, 12, fine ? 13 : 7);
  grid.gradients = geometric(1.0 / 600, 0.5, fine ? 9 : 5);
  grid.lengths = {3 * spacing_um, 9 * spacing_um};
  return grid;
}

/// Log-normal around the common jitter, with a floor for waves of another kind.
double jitter_prior(double jitter, double common) {
  constexpr double spread = 0.35;  // waves of one tube: within a factor of two
  constexpr double floor = 0.02;
  const double off = std::log(jitter / common) / spread;
  return std::exp(-0.5 * off * off) + floor;
}

double sum_in_logs(const std::vector<double>& logs) {
  const double top = *std::max_element(logs.begin(), logs.end());
  double sum = 0;
  for (const double one : logs) sum += std::exp(one - top);
  return top + std::log(sum);
}

std::vector<double> grid_likelihoods(const Arrivals& arrivals, const Grid& grid) {
  std::vector<double> logs(grid.size());
  for (std::size_t i = 0; i < grid.size(); ++i)
    logs[i] = restricted_likelihood(arrivals, grid.at(i));
  return logs;
}

std::vector<double> with_prior(std::vector<double> logs, const Grid& grid, double common) {
  for (std::size_t i = 0; i < logs.size(); ++i)
    logs[i] += std::log(jitter_prior(grid.at(i).jitter_min, common));
  return logs;
}

/// The jitter under which all waves together are most likely.
double common_jitter(const std::vector<std::vector<double>>& likelihoods, const Grid& grid) {
  double best = grid.jitters.front();
  double highest = 0;
  for (const double common : geometric(grid.jitters.front(), grid.jitters.back(), 40)) {
    double sum = 0;
    for (const auto& logs : likelihoods) sum += sum_in_logs(with_prior(logs, grid, common));
    if (common == grid.jitters.front() || sum > highest) {
      highest = sum;
      best = common;
    }
  }
  return best;
}

/// Log density of one arrival given all others, averaged over the scales.
double log_density_given_rest(const Arrivals& kept, std::size_t which, double common,
                              const Grid& grid) {
  std::vector<char> left_out(kept.times_min.size(), 0);
  left_out[which] = 1;
  const auto rest = kept_of(kept, left_out);
  return sum_in_logs(with_prior(grid_likelihoods(kept, grid), grid, common)) -
         sum_in_logs(with_prior(grid_likelihoods(rest, grid), grid, common));
}

FieldFit fit_of(const std::vector<double>& likelihoods, const Grid& grid, double common) {
  const auto logs = with_prior(likelihoods, grid, common);
  const double all = sum_in_logs(logs);
  FieldFit fit;
  for (std::size_t i = 0; i < logs.size(); ++i)
    fit.scales.push_back({grid.at(i), std::exp(logs[i] - all)});
  for (const auto& one : fit.scales) fit.jitter_min += one.weight * one.scale.jitter_min;
  std::stable_sort(fit.scales.begin(), fit.scales.end(),
                   [](const auto& left, const auto& right) { return left.weight > right.weight; });
  return fit;
}

constexpr std::size_t least_for_scales = 5;

/// Sets aside, one by one, the arrivals that the rest makes less likely than strays.
std::vector<char> find_astray(const Arrivals& arrivals, double common, double spacing_um,
                              double period_min) {
  constexpr double stray_share = 0.02;
  constexpr double most_share = 0.15;
  constexpr double worth_a_look = 2.5;  // standard deviations
  const auto grid = scale_grid(spacing_um, false);
  std::vector<char> astray(arrivals.times_min.size(), 0);
  const auto most = static_cast<int>(most_share * static_cast<double>(astray.size()));
  const double threshold = std::log(stray_share / period_min);
  for (int found = 0; found < most; ++found) {
    FieldFit fit = fit_of(grid_likelihoods(thinned(kept_of(arrivals, astray)), grid), grid, common);
    fit.astray = astray;
    const auto left_out = leave_one_out(arrivals, fit);
    std::size_t worst = astray.size();
    double largest = worth_a_look;
    std::size_t position = 0, worst_position = 0;
    for (std::size_t i = 0; i < astray.size(); ++i) {
      if (astray[i]) continue;
      const double off = std::abs(left_out[i].residual_min) / left_out[i].sd_min;
      if (off > largest) {
        largest = off;
        worst = i;
        worst_position = position;
      }
      ++position;
    }
    if (worst == astray.size()) break;
    constexpr std::size_t most_for_deletion = 120;
    const auto kept = kept_of(arrivals, astray);
    const double density =
        kept.times_min.size() <= most_for_deletion
            ? log_density_given_rest(kept, worst_position, common, grid)
            : -0.5 * largest * largest - std::log(left_out[worst].sd_min * 2.5066282746310002);
    if (density > threshold) break;
    astray[worst] = 1;
  }
  return astray;
}

MatrixXd root_of(MatrixXd covariance_matrix) {
  const double level = covariance_matrix.diagonal().maxCoeff();
  for (double nugget = 1e-10; nugget < 1; nugget *= 10) {
    MatrixXd lifted = covariance_matrix;
    lifted.diagonal().array() += nugget * level + 1e-14;
    const Eigen::LLT<MatrixXd> root(lifted);
    if (root.info() == Eigen::Success) return root.matrixL();
  }
  return MatrixXd::Zero(covariance_matrix.rows(), covariance_matrix.cols());
}

VectorXd normals(const CounterRandom& random, std::uint64_t stream, Eigen::Index count) {
  VectorXd values(count);
  for (Eigen::Index i = 0; i < count; ++i)
    values(i) = random.normal(stream, static_cast<std::uint64_t>(i));
  return values;
}

}  // namespace

double restricted_likelihood(const Arrivals& arrivals, const FieldScale& scale) {
  return likelihood_of(arrivals, solve(arrivals, scale));
}

std::vector<FieldFit> fit_fields(const std::vector<Arrivals>& waves, double spacing_um,
                                 double period_min) {
  const auto grid = scale_grid(spacing_um, true);
  std::vector<std::vector<char>> astray(waves.size());
  std::vector<std::vector<double>> likelihoods(waves.size());
  double common = 0;
  for (const bool last : {false, true}) {
    std::vector<std::vector<double>> pooled;
    for (std::size_t i = 0; i < waves.size(); ++i) {
      if (waves[i].times_min.size() < least_for_scales) continue;
      const bool changed = std::find(astray[i].begin(), astray[i].end(), 1) != astray[i].end();
      if (!last || changed)
        likelihoods[i] = grid_likelihoods(thinned(kept_of(waves[i], astray[i])), grid);
      pooled.push_back(likelihoods[i]);
    }
    if (pooled.empty()) break;
    common = common_jitter(pooled, grid);
    if (last) break;
    for (std::size_t i = 0; i < waves.size(); ++i) {
      if (waves[i].times_min.size() >= least_for_scales)
        astray[i] = find_astray(waves[i], common, spacing_um, period_min);
    }
  }
  std::vector<FieldFit> fits(waves.size());
  for (std::size_t i = 0; i < waves.size(); ++i) {
    if (!likelihoods[i].empty()) fits[i] = fit_of(likelihoods[i], grid, common);
    fits[i].astray = std::move(astray[i]);
    fits[i].astray.resize(waves[i].times_min.size(), 0);
    if (likelihoods[i].empty()) fits[i].jitter_min = common;
  }
  return fits;
}

FieldPosterior::FieldPosterior(const Arrivals& arrivals, const std::vector<char>& astray,
                               const FieldScale& scale, const std::vector<Point>& places_um) {
  const auto kept = kept_of(arrivals, astray);
  const auto solved = solve(kept, scale);
  const MatrixXd across = covariances(kept.places_um, places_um, scale);
  const MatrixXd own_trend = trend(places_um, kept.plane);
  mean_ = own_trend * solved.trend_values + across.transpose() * solved.weighted_residual;
  const MatrixXd half = solved.total.matrixL().solve(across);
  const MatrixXd open = own_trend - across.transpose() * solved.weighted_trend;
  MatrixXd posterior = covariances(places_um, places_um, scale) - half.transpose() * half;
  posterior += open * solved.trend_information.solve(open.transpose());
  root_ = root_of(std::move(posterior));
}

VectorXd FieldPosterior::se_min() const {
  return root_.rowwise().norm();
}

VectorXd FieldPosterior::draw(const CounterRandom& random, std::uint64_t stream) const {
  return mean_ + root_.triangularView<Eigen::Lower>() * normals(random, stream, mean_.size());
}

std::vector<LeftOut> leave_one_out(const Arrivals& arrivals, const FieldFit& fit) {
  const auto count = arrivals.times_min.size();
  std::vector<LeftOut> result(count);
  constexpr std::size_t most_scales = 8;
  double all = 0;
  std::vector<double> variance(count, 0.0);
  for (std::size_t s = 0; s < std::min(most_scales, fit.scales.size()); ++s) {
    const auto& [scale, weight] = fit.scales[s];
    const auto kept = kept_of(arrivals, fit.astray);
    const auto solved = solve(kept, scale);
    const MatrixXd inverse =
        solved.total.solve(MatrixXd::Identity(solved.total.rows(), solved.total.cols())) -
        solved.weighted_trend * solved.trend_information.solve(solved.weighted_trend.transpose());
    const FieldPosterior outside(arrivals, fit.astray, scale, arrivals.places_um);
    const VectorXd se = outside.se_min();
    Eigen::Index at = 0;
    for (std::size_t i = 0; i < count; ++i) {
      const double own =
          scale.jitter_min * scale.jitter_min + arrivals.se_min[i] * arrivals.se_min[i];
      const bool stray = !fit.astray.empty() && fit.astray[i];
      const auto index = static_cast<Eigen::Index>(i);
      const double residual = stray ? arrivals.times_min[i] - outside.mean_min()(index)
                                    : solved.weighted_residual(at) / inverse(at, at);
      const double square = stray ? se(index) * se(index) + own : 1 / inverse(at, at);
      if (!stray) ++at;
      result[i].residual_min += weight * residual;
      variance[i] += weight * square;
    }
    all += weight;
  }
  for (std::size_t i = 0; i < count; ++i) {
    if (all <= 0) continue;
    result[i].residual_min /= all;
    result[i].sd_min = std::sqrt(variance[i] / all);
  }
  return result;
}

FieldPrior::FieldPrior(const std::vector<Point>& places_um, const FieldScale& scale,
                       double trend_sd_min_per_um) {
  MatrixXd all = covariances(places_um, places_um, scale);
  const double square = trend_sd_min_per_um * trend_sd_min_per_um;
  for (Eigen::Index j = 0; j < all.cols(); ++j)
    for (Eigen::Index i = 0; i < all.rows(); ++i)
      all(i, j) += square * (places_um[i].x * places_um[j].x);
  root_ = root_of(std::move(all));
}

VectorXd FieldPrior::draw(const CounterRandom& random, std::uint64_t stream) const {
  return root_.triangularView<Eigen::Lower>() * normals(random, stream, root_.rows());
}

}  // namespace wavefount
