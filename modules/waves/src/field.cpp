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

/// Matérn 3/2 (Stein 1999): once differentiable, so that fronts may bend sharply where they start
/// and where they meet.
double covariance(Point a, Point b, const FieldScale& scale) {
  const double reach = std::numbers::sqrt3 * std::hypot(a.x - b.x, a.y - b.y) / scale.length_um;
  const double sd = scale.gradient_min_per_um * scale.length_um / std::numbers::sqrt3;
  return sd * sd * (1 + reach) * std::exp(-reach);
}

MatrixXd covariances(const std::vector<Point>& places, const FieldScale& scale) {
  MatrixXd matrix(places.size(), places.size());
  for (Eigen::Index j = 0; j < matrix.cols(); ++j)
    for (Eigen::Index i = 0; i < matrix.rows(); ++i)
      matrix(i, j) = covariance(places[i], places[j], scale);
  return matrix;
}

/// Level and slope along; in mm, to keep the equations well scaled.
MatrixXd trend(const std::vector<Point>& places) {
  MatrixXd columns(places.size(), 2);
  for (Eigen::Index i = 0; i < columns.rows(); ++i) {
    columns(i, 0) = 1;
    columns(i, 1) = places[i].x / 1000;
  }
  return columns;
}

double log_determinant(const Eigen::LLT<MatrixXd>& root) {
  return 2 * root.matrixLLT().diagonal().array().log().sum();
}

/// Those that take part; of very large waves every so many, since the likelihood costs n³.
Arrivals taking_part(const Arrivals& arrivals, const std::vector<char>& astray) {
  constexpr std::size_t most = 120;
  Arrivals kept;
  const auto count = arrivals.times_min.size();
  const auto every = std::max<std::size_t>(1, (count + most - 1) / most);
  for (std::size_t i = 0; i < count; i += every) {
    if (astray[i]) continue;
    kept.places_um.push_back(arrivals.places_um[i]);
    kept.times_min.push_back(arrivals.times_min[i]);
    kept.se_min.push_back(arrivals.se_min[i]);
  }
  return kept;
}

std::vector<double> geometric(double from, double to, int count) {
  std::vector<double> values;
  for (int i = 0; i < count; ++i)
    values.push_back(from * std::pow(to / from, static_cast<double>(i) / (count - 1)));
  return values;
}

MatrixXd root_of(MatrixXd matrix) {
  const double level = std::max(matrix.diagonal().maxCoeff(), 1e-12);
  for (double nugget = 1e-10; nugget < 1; nugget *= 10) {
    MatrixXd lifted = matrix;
    lifted.diagonal().array() += nugget * level;
    const Eigen::LLT<MatrixXd> root(lifted);
    if (root.info() == Eigen::Success) return root.matrixL();
  }
  return MatrixXd::Identity(matrix.rows(), matrix.cols());
}

}  // namespace

double restricted_likelihood(const Arrivals& arrivals, const FieldScale& scale) {
  MatrixXd total = covariances(arrivals.places_um, scale);
  for (Eigen::Index i = 0; i < total.rows(); ++i)
    total(i, i) += scale.jitter_min * scale.jitter_min + arrivals.se_min[i] * arrivals.se_min[i];
  const Eigen::LLT<MatrixXd> root(total);
  const MatrixXd columns = trend(arrivals.places_um);
  const MatrixXd weighted = root.solve(columns);
  MatrixXd information = columns.transpose() * weighted;
  information.diagonal().array() += 1e-9;  // nuclei all at one place leave the slope open
  const Eigen::LLT<MatrixXd> information_root(information);
  const auto count = static_cast<Eigen::Index>(arrivals.times_min.size());
  const VectorXd times = Eigen::Map<const VectorXd>(arrivals.times_min.data(), count);
  const VectorXd values = information_root.solve(weighted.transpose() * times);
  const VectorXd residual = times - columns * values;
  return -0.5 * (log_determinant(root) + log_determinant(information_root) +
                 residual.dot(root.solve(residual)));
}

std::vector<WeightedScale> fit_scales(const Arrivals& arrivals, const std::vector<char>& astray,
                                      double jitter_min, double spacing_um) {
  const auto kept = taking_part(arrivals, astray);
  std::vector<WeightedScale> scales;
  // Slopes from ten times faster than anything published (600 µm/min) to ten times slower than
  // usual (2 µm/min); slopes that change over a few nuclei up to the length of a tube.
  for (const double length : {3 * spacing_um, 9 * spacing_um}) {
    for (const double gradient : geometric(1.0 / 600, 0.5, 9)) {
      const FieldScale scale{std::max(jitter_min, 0.01), gradient, length};
      scales.push_back({scale, restricted_likelihood(kept, scale)});
    }
  }
  const auto lower = [](const auto& left, const auto& right) { return left.weight < right.weight; };
  const double top = std::max_element(scales.begin(), scales.end(), lower)->weight;
  double sum = 0;
  for (auto& one : scales) sum += one.weight = std::exp(one.weight - top);
  for (auto& one : scales) one.weight /= sum;
  std::stable_sort(scales.begin(), scales.end(),
                   [&](const auto& left, const auto& right) { return lower(right, left); });
  return scales;
}

FieldPrior::FieldPrior(const std::vector<Point>& places_um, const FieldScale& scale,
                       double trend_sd_min_per_um) {
  MatrixXd all = covariances(places_um, scale);
  double middle = 0;
  for (const auto& place : places_um) middle += place.x / static_cast<double>(places_um.size());
  const double square = trend_sd_min_per_um * trend_sd_min_per_um;
  for (Eigen::Index j = 0; j < all.cols(); ++j)
    for (Eigen::Index i = 0; i < all.rows(); ++i)
      all(i, j) += square * (places_um[i].x - middle) * (places_um[j].x - middle);
  root_ = root_of(std::move(all));
}

VectorXd FieldPrior::draw(const CounterRandom& random, std::uint64_t stream) const {
  VectorXd values(root_.rows());
  for (Eigen::Index i = 0; i < values.size(); ++i)
    values(i) = random.normal(stream, static_cast<std::uint64_t>(i));
  return root_.triangularView<Eigen::Lower>() * values;
}

std::vector<double> chance_of_first(const Arrivals& arrivals,
                                    const std::vector<WeightedScale>& scales,
                                    double trend_sd_min_per_um, int draws, std::uint64_t seed) {
  std::vector<double> chance(arrivals.places_um.size(), 0.0);
  const CounterRandom random(seed);
  double cumulative = 0;
  int drawn = 0;
  for (const auto& [scale, weight] : scales) {
    cumulative += weight;
    const int until = std::min(draws, static_cast<int>(std::lround(cumulative * draws)));
    if (until <= drawn) continue;
    const FieldPrior prior(arrivals.places_um, scale, trend_sd_min_per_um);
    for (; drawn < until; ++drawn) {
      Eigen::Index first = 0;
      prior.draw(random, static_cast<std::uint64_t>(drawn)).minCoeff(&first);
      chance[first] += 1.0 / draws;
    }
  }
  return chance;
}

}  // namespace wavefount
