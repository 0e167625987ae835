#pragma once

#include <functional>
#include <optional>
#include <span>
#include <vector>

namespace wavefount {

/// Limits of one parameter, kept by transformation (James & Roos, Comput. Phys. Commun. 1975,
/// 10:343): a fit never evaluates the model outside them.
struct ParameterBounds {
  std::optional<double> lowest, highest;
};

/// Fills `residuals`, each already divided by its standard deviation.
using ResidualFunction =
    std::function<void(std::span<const double> parameters, std::span<double> residuals)>;
/// Fills the derivatives of the residuals, row by row: residual i, parameter j at
/// i · parameters + j.
using JacobianFunction =
    std::function<void(std::span<const double> parameters, std::span<double> jacobian)>;

struct LeastSquaresProblem {
  int residual_count = 0;
  ResidualFunction residuals;
  JacobianFunction jacobian;            ///< empty: central differences
  std::vector<ParameterBounds> bounds;  ///< empty: none
};

struct LeastSquaresFit {
  std::vector<double> parameters;
  std::vector<double> covariance;  ///< (JᵀJ)⁻¹, row by row; not scaled by the dispersion
  double sum_of_squares = 0;
  int freedom = 0;  ///< residuals less parameters
  int iterations = 0;
  bool converged = false;

  double variance(int parameter) const;
  double covariance_of(int first, int second) const;
  /// sum_of_squares / freedom; 0 without freedom.
  double dispersion() const;
};

/// Non-linear least squares by Levenberg–Marquardt with the scaling of Moré (1978) and the damping
/// of Nielsen (1999); each step solved by QR, so that the normal equations' squared condition never
/// enters. A start outside its bounds is moved inside. A singular problem gives `converged` false
/// and an infinite variance, never an exception.
LeastSquaresFit minimise_squares(const LeastSquaresProblem& problem,
                                 const std::vector<double>& start, int most_iterations = 500);

}  // namespace wavefount
