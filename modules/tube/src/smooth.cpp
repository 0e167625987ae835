#include "wavefount/tube/smooth.h"

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <numbers>

#include "wavefount/core/robust.h"

namespace wavefount::tube {
namespace {

/// Symmetric matrix with two side diagonals.
struct Banded {
  std::vector<double> diagonal, first, second;
};

Banded penalty(std::size_t count, double strength) {
  Banded matrix{std::vector<double>(count, 0), std::vector<double>(count, 0),
                std::vector<double>(count, 0)};
  for (std::size_t i = 0; i + 2 < count; ++i) {
    matrix.diagonal[i] += strength;
    matrix.diagonal[i + 1] += 4 * strength;
    matrix.diagonal[i + 2] += strength;
    matrix.first[i] -= 2 * strength;
    matrix.first[i + 1] -= 2 * strength;
    matrix.second[i] += strength;
  }
  return matrix;
}

/// L D Lᵀ of a pentadiagonal matrix, then both substitutions.
std::vector<double> solve(Banded matrix, std::vector<double> right) {
  auto& [d, e, f] = matrix;
  const std::size_t count = right.size();
  for (std::size_t i = 0; i < count; ++i) {
    if (i + 1 < count) {
      const double l1 = e[i] / d[i];
      d[i + 1] -= l1 * e[i];
      e[i + 1] -= l1 * f[i];
      right[i + 1] -= l1 * right[i];
      if (i + 2 < count) {
        const double l2 = f[i] / d[i];
        d[i + 2] -= l2 * f[i];
        right[i + 2] -= l2 * right[i];
        f[i] = l2;
      }
      e[i] = l1;
    }
  }
  for (std::size_t i = count; i-- > 0;) {
    right[i] /= d[i];
    if (i + 1 < count) right[i] -= e[i] * right[i + 1];
    if (i + 2 < count) right[i] -= f[i] * right[i + 2];
  }
  return right;
}

}  // namespace

std::vector<double> smooth(const std::vector<double>& values, const std::vector<double>& weights,
                           double cutoff) {
  const std::size_t count = values.size();
  if (std::none_of(weights.begin(), weights.end(), [](double one) { return one > 0; }))
    return std::vector<double>(count, 0.0);
  const double wave = 2 * std::sin(std::numbers::pi / std::max(cutoff, 2.0));
  auto matrix = penalty(count, std::pow(wave, -4));
  std::vector<double> right(count, 0.0);
  for (std::size_t i = 0; i < count; ++i) {
    // A hair of weight everywhere keeps the matrix regular when fewer than two values count.
    matrix.diagonal[i] += weights[i] + 1e-9;
    if (weights[i] > 0) right[i] = weights[i] * values[i];
  }
  double mean = 0;
  double total = 0;
  for (std::size_t i = 0; i < count; ++i) {
    if (weights[i] <= 0) continue;
    mean += weights[i] * values[i];
    total += weights[i];
  }
  mean /= total;
  for (std::size_t i = 0; i < count; ++i) right[i] += 1e-9 * mean;
  return solve(std::move(matrix), std::move(right));
}

std::vector<double> smooth_robust(const std::vector<double>& values, std::vector<double>& weights,
                                  double cutoff) {
  const auto given = weights;
  // The first rounds are stiffer, so that a stretch of debris does not pull the curve to itself,
  // and wider in what they accept, so that a bend is not taken for debris.
  constexpr int rounds = 10;
  constexpr double smallest_scale = 0.25;
  auto curve = smooth(values, weights, 2 * cutoff);
  for (int round = 0; round < rounds; ++round) {
    std::vector<double> rests;
    for (std::size_t i = 0; i < values.size(); ++i)
      if (given[i] > 0) rests.push_back(std::abs(values[i] - curve[i]));
    const double scale = std::max(smallest_scale, 1.4826 * median(std::move(rests)));
    const double cut = 4.685 * scale * std::max(1.0, 4.0 - round);
    for (std::size_t i = 0; i < values.size(); ++i) {
      if (given[i] <= 0) continue;
      const double u = (values[i] - curve[i]) / cut;
      weights[i] = std::abs(u) < 1 ? given[i] * (1 - u * u) * (1 - u * u) : 0;
    }
    curve = smooth(values, weights, round < 2 ? 2 * cutoff : cutoff);
  }
  return curve;
}

}  // namespace wavefount::tube
