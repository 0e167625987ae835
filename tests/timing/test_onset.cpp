#include <gtest/gtest.h>

#include <Eigen/Dense>
#include <cmath>
#include <iostream>
#include <random>

#include "simulated_film.h"
#include "wavefount/timing/onset.h"

namespace wavefount {
namespace {

constexpr double noise = 0.05;
constexpr double true_level = 1, true_slope = 0.01;

double model(const simulated::Release& release, double time, double onset, double level,
             double slope, double bend, double base) {
  const double since = time - onset;
  if (since < 0) return level + slope * since + bend * since * since;
  return base + (level - base) * release(since);
}

FallWindow window_at(const simulated::Release& release, double interval, double onset,
                     std::mt19937_64& random) {
  std::normal_distribution<double> normal;
  FallWindow window;
  window.interval_min = interval;
  window.radius_um = 10;
  window.age_min = 25;
  window.level = 1;
  for (int i = 0; i < 18; ++i) {
    const double time = i * interval;
    window.samples.push_back(
        {time, model(release, time, onset, true_level, true_slope, 0, 0) + noise * normal(random),
         noise * noise});
  }
  window.earliest_min = onset - 3.3 * interval;
  window.latest_min = onset + 3 * interval;
  return window;
}

// Smallest standard deviation of the onset that an unbiased estimate can have (Cramér 1946, Rao
// 1945), the shape known, level, slope, bend and base not.
double bound(const simulated::Release& release, double interval, double onset) {
  constexpr int count = 18, parameters = 5;
  Eigen::MatrixXd jacobian(count, parameters);
  Eigen::Matrix<double, parameters, 1> at;
  at << onset, true_level, true_slope, 0, 0;
  for (int i = 0; i < count; ++i)
    for (int j = 0; j < parameters; ++j) {
      auto above = at, below = at;
      const double step = j == 0 ? 1e-3 * interval : 1e-5;
      above[j] += step;
      below[j] -= step;
      const auto value = [&](const auto& p) {
        return model(release, i * interval, p[0], p[1], p[2], p[3], p[4]);
      };
      jacobian(i, j) = (value(above) - value(below)) / (2 * step * noise);
    }
  return std::sqrt((jacobian.transpose() * jacobian).inverse()(0, 0));
}

void expect_near_bound(double interval, double highest_ratio) {
  const auto release = simulated::pores_then_clouds(0.3, 0.4);
  std::mt19937_64 random(7);
  std::uniform_real_distribution<double> phase(9, 10);
  std::vector<FallWindow> windows;
  std::vector<double> truth;
  double bounds = 0;
  for (int i = 0; i < 200; ++i) {
    truth.push_back(phase(random) * interval);
    windows.push_back(window_at(release, interval, truth.back(), random));
    bounds += std::pow(bound(release, interval, truth.back()), 2);
  }
  const auto onsets = time_falls(windows, {}, 80);
  double squares = 0, sum = 0;
  int held = 0;
  for (std::size_t i = 0; i < truth.size(); ++i) {
    squares += std::pow(onsets[i].time_min - truth[i], 2);
    sum += onsets[i].time_min - truth[i];
    held += std::abs(onsets[i].time_min - truth[i]) <= 1.96 * onsets[i].se_min;
  }
  const double ratio = std::sqrt(squares / bounds);
  std::cout << "  " << interval << " min a frame: error " << std::sqrt(squares / 200) / interval
            << " frame intervals (bias " << sum / 200 / interval << "), over the Cramér–Rao bound "
            << ratio << ", 95 % intervals hold " << held / 2.0 << " %\n";
  EXPECT_LT(ratio, highest_ratio);
  EXPECT_GE(held, 180);
}

// The priors on the filling can take an estimate below the bound of one that knows nothing of it.
TEST(Onset, comes_near_the_cramer_rao_bound) {
  expect_near_bound(0.1, 1.3);
  expect_near_bound(0.25, 1.3);
  expect_near_bound(0.5, 1.3);
}

TEST(Onset, nothing_to_time_is_no_error) {
  EXPECT_TRUE(time_falls({}, {}, 80).empty());
  EXPECT_EQ(pool_shape({}, {}, 80).shapes.size(), 1u);
}

TEST(Onset, one_fall_alone_has_an_honest_error) {
  const auto release = simulated::disc_by_clouds(0.5);
  std::mt19937_64 random(3);
  std::uniform_real_distribution<double> phase(9, 10);
  int held = 0;
  for (int i = 0; i < 60; ++i) {
    const double truth = phase(random) * 0.5;
    const auto onset = time_falls({window_at(release, 0.5, truth, random)}, {}, 80).front();
    held += std::abs(onset.time_min - truth) <= 1.96 * onset.se_min;
  }
  std::cout << "  one fall a film: 95 % intervals hold " << held / 0.6 << " %\n";
  EXPECT_GE(held, 53);
}

}  // namespace
}  // namespace wavefount
