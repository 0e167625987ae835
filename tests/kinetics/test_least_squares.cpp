#include <gtest/gtest.h>

#include <cmath>
#include <iostream>

#include "wavefount/kinetics/least_squares.h"

namespace wavefount {
namespace {

// Reference data sets with certified results of the Statistical Reference Datasets of the National
// Institute of Standards and Technology (Misra1a: lower difficulty; BoxBOD and MGH09: higher).
struct Certified {
  std::vector<double> x, y;
  std::vector<std::vector<double>> starts;
  std::vector<double> parameters, standard_deviations;
  double sum_of_squares = 0;
};

const Certified misra1a{{77.6, 114.9, 141.1, 190.8, 239.9, 289.0, 332.8, 378.4, 434.8, 477.3, 536.8,
                         593.1, 689.1, 760.0},
                        {10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02, 44.82, 50.76, 55.05,
                         61.01, 66.40, 75.47, 81.78},
                        {{500, 0.0001}, {250, 0.0005}},
                        {2.3894212918E+02, 5.5015643181E-04},
                        {2.7070075241E+00, 7.2668688436E-06},
                        1.2455138894E-01};

const Certified boxbod{{1, 2, 3, 5, 7, 10},
                       {109, 149, 149, 191, 213, 224},
                       {{1, 1}, {100, 0.75}},
                       {2.1380940889E+02, 5.4723748542E-01},
                       {1.2354515176E+01, 1.0455993237E-01},
                       1.1680088766E+03};

const Certified mgh09{
    {4, 2, 1, 0.5, 0.25, 0.167, 0.125, 0.1, 0.0833, 0.0714, 0.0625},
    {0.1957, 0.1947, 0.1735, 0.16, 0.0844, 0.0627, 0.0456, 0.0342, 0.0323, 0.0235, 0.0246},
    {{25, 39, 41.5, 39}, {0.25, 0.39, 0.415, 0.39}},
    {1.9280693458E-01, 1.9128232873E-01, 1.2305650693E-01, 1.3606233068E-01},
    {1.1435312227E-02, 1.9633220911E-01, 8.0842031232E-02, 9.0025542308E-02},
    3.0750560385E-04};

double saturating(std::span<const double> b, double x) {
  return b[0] * (1 - std::exp(-b[1] * x));
}

double rational(std::span<const double> b, double x) {
  return b[0] * (x * x + x * b[1]) / (x * x + x * b[2] + b[3]);
}

void check(const Certified& set, double (*model)(std::span<const double>, double)) {
  for (const auto& start : set.starts) {
    LeastSquaresProblem problem;
    problem.residual_count = static_cast<int>(set.x.size());
    problem.residuals = [&](std::span<const double> b, std::span<double> r) {
      for (std::size_t i = 0; i < set.x.size(); ++i) r[i] = model(b, set.x[i]) - set.y[i];
    };
    const auto fit = minimise_squares(problem, start, 5000);
    EXPECT_TRUE(fit.converged) << "from " << start[0];
    EXPECT_NEAR(fit.sum_of_squares / set.sum_of_squares, 1, 1e-8) << "from " << start[0];
    for (std::size_t j = 0; j < start.size(); ++j) {
      EXPECT_NEAR(fit.parameters[j] / set.parameters[j], 1, 1e-5) << j << " from " << start[0];
      const double sd = std::sqrt(fit.variance(static_cast<int>(j)) * fit.dispersion());
      EXPECT_NEAR(sd / set.standard_deviations[j], 1, 1e-4) << j << " from " << start[0];
    }
    std::cout << "  from " << start[0] << ": " << fit.iterations << " iterations\n";
  }
}

TEST(LeastSquares, reaches_certified_values_of_misra1a) {
  check(misra1a, saturating);
}
TEST(LeastSquares, reaches_certified_values_of_boxbod) {
  check(boxbod, saturating);
}
TEST(LeastSquares, reaches_certified_values_of_mgh09) {
  check(mgh09, rational);
}

TEST(LeastSquares, analytic_and_numeric_derivatives_agree) {
  LeastSquaresProblem problem;
  problem.residual_count = static_cast<int>(misra1a.x.size());
  problem.residuals = [](std::span<const double> b, std::span<double> r) {
    for (std::size_t i = 0; i < r.size(); ++i) r[i] = saturating(b, misra1a.x[i]) - misra1a.y[i];
  };
  const auto numeric = minimise_squares(problem, misra1a.starts[0]);
  problem.jacobian = [](std::span<const double> b, std::span<double> jacobian) {
    for (std::size_t i = 0; i < misra1a.x.size(); ++i) {
      const double left = std::exp(-b[1] * misra1a.x[i]);
      jacobian[2 * i] = 1 - left;
      jacobian[2 * i + 1] = b[0] * misra1a.x[i] * left;
    }
  };
  const auto analytic = minimise_squares(problem, misra1a.starts[0]);
  for (int j = 0; j < 2; ++j) {
    EXPECT_NEAR(analytic.parameters[j] / numeric.parameters[j], 1, 1e-7);
    EXPECT_NEAR(analytic.variance(j) / numeric.variance(j), 1, 1e-5);
  }
}

TEST(LeastSquares, stays_within_bounds_and_reaches_an_optimum_on_them) {
  for (const auto& bounds : {ParameterBounds{0.0, 200.0}, ParameterBounds{{}, 200.0}}) {
    LeastSquaresProblem problem;
    problem.residual_count = static_cast<int>(boxbod.x.size());
    problem.bounds = {bounds, ParameterBounds{0.0, {}}};
    problem.residuals = [](std::span<const double> b, std::span<double> r) {
      EXPECT_LE(b[0], 200.0);
      EXPECT_GE(b[1], 0.0);
      for (std::size_t i = 0; i < r.size(); ++i) r[i] = saturating(b, boxbod.x[i]) - boxbod.y[i];
    };
    // Central differences may step over a bound by their own width; give the derivatives.
    problem.jacobian = [](std::span<const double> b, std::span<double> jacobian) {
      for (std::size_t i = 0; i < boxbod.x.size(); ++i) {
        const double left = std::exp(-b[1] * boxbod.x[i]);
        jacobian[2 * i] = 1 - left;
        jacobian[2 * i + 1] = b[0] * boxbod.x[i] * left;
      }
    };
    const auto fit = minimise_squares(problem, {100, 0.75}, 2000);
    EXPECT_NEAR(fit.parameters[0], 200, 0.01);
  }
}

TEST(LeastSquares, a_parameter_without_effect_gives_no_false_certainty) {
  LeastSquaresProblem problem;
  problem.residual_count = 4;
  problem.residuals = [](std::span<const double> b, std::span<double> r) {
    for (std::size_t i = 0; i < 4; ++i) r[i] = b[0] - static_cast<double>(i);
  };
  const auto fit = minimise_squares(problem, {0, 1});
  EXPECT_FALSE(fit.converged);
  EXPECT_TRUE(std::isinf(fit.variance(1)));
}

}  // namespace
}  // namespace wavefount
