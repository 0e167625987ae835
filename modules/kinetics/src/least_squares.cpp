#include "wavefount/kinetics/least_squares.h"

#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

namespace wavefount {

namespace {

using Vector = Eigen::VectorXd;
using Matrix = Eigen::MatrixXd;

// Where no further digit can be gained in double precision.
constexpr double smallest_gain = 1e-15;
constexpr double smallest_step = 1e-13;
// In units of the scaled diagonal. A run that ends where a parameter no longer has any effect is
// repeated from its start with shorter first steps.
constexpr double first_dampings[] = {1, 1e2, 1e4, 1e6};
constexpr double highest_damping = 1e24;

// One parameter between free inner coordinate and bounded outer value.
class Transformation {
 public:
  explicit Transformation(const ParameterBounds& bounds) : bounds_(bounds) {}

  double outer(double u) const {
    const auto& [low, high] = bounds_;
    if (low && high) return *low + (*high - *low) * 0.5 * (std::sin(u) + 1);
    if (low) return *low - 1 + std::sqrt(u * u + 1);
    if (high) return *high + 1 - std::sqrt(u * u + 1);
    return u;
  }

  double slope(double u) const {
    const auto& [low, high] = bounds_;
    if (low && high) return (*high - *low) * 0.5 * std::cos(u);
    if (low) return u / std::sqrt(u * u + 1);
    if (high) return -u / std::sqrt(u * u + 1);
    return 1;
  }

  double inner(double x) const {
    const auto& [low, high] = bounds_;
    // A start on a bound has no slope and would stay there.
    if (low && high) {
      const double share = std::clamp((x - *low) / (*high - *low), 0.01, 0.99);
      return std::asin(2 * share - 1);
    }
    if (low) return std::sqrt(std::pow(std::max(x - *low, 1e-4) + 1, 2) - 1);
    if (high) return std::sqrt(std::pow(std::max(*high - x, 1e-4) + 1, 2) - 1);
    return x;
  }

 private:
  ParameterBounds bounds_;
};

class Minimiser {
 public:
  Minimiser(const LeastSquaresProblem& problem, const std::vector<double>& start, double damping)
      : problem_(problem), count_(static_cast<int>(start.size())), damping_(damping) {
    u_.resize(count_);
    for (int j = 0; j < count_; ++j) {
      transformations_.emplace_back(problem.bounds.empty() ? ParameterBounds{} : problem.bounds[j]);
      u_[j] = transformations_[j].inner(start[j]);
    }
  }

  LeastSquaresFit run(int most_iterations) {
    Vector residuals = residuals_at(outer(u_));
    squares_ = residuals.squaredNorm();
    LeastSquaresFit fit;
    scale_ = Vector::Zero(count_);
    if (std::isfinite(squares_)) {
      for (; fit.iterations < most_iterations && !fit.converged; ++fit.iterations)
        if (!iterate(residuals, fit.converged)) break;
    }
    finish(fit);
    return fit;
  }

 private:
  Vector outer(const Vector& u) const {
    Vector x(count_);
    for (int j = 0; j < count_; ++j) x[j] = transformations_[j].outer(u[j]);
    return x;
  }

  Vector residuals_at(const Vector& x) const {
    Vector residuals(problem_.residual_count);
    problem_.residuals({x.data(), static_cast<std::size_t>(x.size())},
                       {residuals.data(), static_cast<std::size_t>(residuals.size())});
    return residuals;
  }

  Matrix jacobian_at(const Vector& x) const {
    using RowMajor = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>;
    RowMajor jacobian(problem_.residual_count, count_);
    if (problem_.jacobian) {
      problem_.jacobian({x.data(), static_cast<std::size_t>(x.size())},
                        {jacobian.data(), static_cast<std::size_t>(jacobian.size())});
      return jacobian;
    }
    for (int j = 0; j < count_; ++j) {
      const double step =
          std::cbrt(std::numeric_limits<double>::epsilon()) * std::max(std::abs(x[j]), 1e-6);
      Vector above = x, below = x;
      above[j] += step;
      below[j] -= step;
      jacobian.col(j) = (residuals_at(above) - residuals_at(below)) / (above[j] - below[j]);
    }
    return jacobian;
  }

  Vector step_for(const Matrix& jacobian, const Vector& residuals) const {
    Matrix augmented(jacobian.rows() + count_, count_);
    augmented << jacobian, Matrix((std::sqrt(damping_) * scale_).asDiagonal());
    Vector right = Vector::Zero(augmented.rows());
    right.head(residuals.size()) = -residuals;
    return augmented.colPivHouseholderQr().solve(right);
  }

  // One new linearisation; false when no step can be found any more.
  bool iterate(Vector& residuals, bool& converged) {
    Matrix jacobian = jacobian_at(outer(u_));
    for (int j = 0; j < count_; ++j) jacobian.col(j) *= transformations_[j].slope(u_[j]);
    if (!jacobian.allFinite()) return false;
    scale_ = scale_.cwiseMax(jacobian.colwise().norm().transpose()).cwiseMax(1e-30);
    const Vector gradient = jacobian.transpose() * residuals;
    for (double growth = 2; damping_ < highest_damping; damping_ *= growth, growth *= 2) {
      const Vector step = step_for(jacobian, residuals);
      const Vector trial = residuals_at(outer(u_ + step));
      const double squares = trial.squaredNorm();
      const double expected =
          damping_ * step.cwiseProduct(scale_).squaredNorm() - step.dot(gradient);
      const bool still = step.norm() <= smallest_step * (u_.norm() + smallest_step);
      if (still || expected <= smallest_gain * squares_) converged = true;
      if (std::isfinite(squares) && squares <= squares_) {
        const double gain = expected > 0 ? (squares_ - squares) / expected : 0;
        damping_ *= std::max(1.0 / 3, 1 - std::pow(2 * gain - 1, 3));
        u_ += step;
        residuals = trial;
        squares_ = squares;
        return true;
      }
      if (converged) return true;
    }
    return false;
  }

  void finish(LeastSquaresFit& fit) const {
    const Vector x = outer(u_);
    fit.parameters.assign(x.data(), x.data() + count_);
    fit.sum_of_squares = squares_;
    fit.freedom = problem_.residual_count - count_;
    fit.covariance.assign(count_ * count_, 0.0);
    const Matrix jacobian = jacobian_at(x);
    Matrix covariance;
    const bool regular = jacobian.allFinite() && invert(jacobian, covariance);
    if (!regular) fit.converged = false;
    for (int i = 0; i < count_; ++i)
      for (int j = 0; j < count_; ++j) {
        const double singular = i == j ? std::numeric_limits<double>::infinity() : 0;
        fit.covariance[i * count_ + j] = regular ? covariance(i, j) : singular;
      }
  }

  // (JᵀJ)⁻¹ from the QR of the column-scaled Jacobian.
  bool invert(const Matrix& jacobian, Matrix& covariance) const {
    if (jacobian.rows() < count_) return false;
    const Vector norms = jacobian.colwise().norm().transpose();
    if (norms.minCoeff() <= 0) return false;
    const Vector inverse = norms.cwiseInverse();
    const Eigen::ColPivHouseholderQR<Matrix> qr(jacobian * inverse.asDiagonal());
    if (qr.rank() < count_) return false;
    const Matrix upper = qr.matrixR().topLeftCorner(count_, count_);
    Matrix root = upper.triangularView<Eigen::Upper>().solve(Matrix::Identity(count_, count_));
    root = inverse.asDiagonal() * (qr.colsPermutation() * root);
    covariance = root * root.transpose();
    return covariance.allFinite();
  }

  const LeastSquaresProblem& problem_;
  int count_;
  std::vector<Transformation> transformations_;
  double damping_;
  Vector u_, scale_;
  double squares_ = 0;
};

}  // namespace

double LeastSquaresFit::variance(int parameter) const {
  return covariance_of(parameter, parameter);
}

double LeastSquaresFit::covariance_of(int first, int second) const {
  return covariance[first * static_cast<int>(parameters.size()) + second];
}

double LeastSquaresFit::dispersion() const {
  return freedom > 0 ? sum_of_squares / freedom : 0;
}

LeastSquaresFit minimise_squares(const LeastSquaresProblem& problem,
                                 const std::vector<double>& start, int most_iterations) {
  LeastSquaresFit fit;
  for (const double damping : first_dampings) {
    fit = Minimiser(problem, start, damping).run(most_iterations);
    if (fit.converged) break;
  }
  return fit;
}

}  // namespace wavefount
