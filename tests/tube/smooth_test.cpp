#include "wavefount/tube/smooth.h"

#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

namespace wavefount::tube {
namespace {

TEST(Smooth, LinesAndGapsAreKept) {
  std::vector<double> values;
  std::vector<double> weights;
  for (int k = 0; k < 100; ++k) {
    const bool gap = k >= 40 && k < 55;
    values.push_back(gap ? 1e6 : 3 + 0.2 * k);
    weights.push_back(gap ? 0 : 1);
  }
  const auto curve = smooth(values, weights, 30);
  for (int k = 0; k < 100; ++k) EXPECT_NEAR(curve[static_cast<std::size_t>(k)], 3 + 0.2 * k, 1e-3);
}

TEST(Smooth, WavesOfTheCutoffAreHalved) {
  std::vector<double> values;
  for (int k = 0; k < 400; ++k) values.push_back(std::sin(2 * std::numbers::pi * k / 40.0));
  const auto curve = smooth(values, std::vector<double>(400, 1.0), 40);
  EXPECT_NEAR(curve[210], values[210] / 2, 0.02);
}

TEST(Smooth, DebrisDropsOutAndBendsStay) {
  std::vector<double> values;
  for (int k = 0; k < 300; ++k) {
    const double bend = 0.0006 * (k - 150) * (k - 150);
    values.push_back(bend + (k > 100 && k < 112 ? 8.0 : 0.0) + 0.1 * std::sin(17.0 * k));
  }
  std::vector<double> weights(300, 1.0);
  const auto curve = smooth_robust(values, weights, 60);
  for (const int k : {5, 106, 150, 294}) {
    const double bend = 0.0006 * (k - 150) * (k - 150);
    EXPECT_NEAR(curve[static_cast<std::size_t>(k)], bend, 0.4) << k;
  }
  EXPECT_EQ(weights[106], 0);
}

TEST(Smooth, NothingGivenIsZero) {
  std::vector<double> weights(5, 0.0);
  EXPECT_EQ(smooth({1, 2, 3, 4, 5}, weights, 10), std::vector<double>(5, 0.0));
}

}  // namespace
}  // namespace wavefount::tube
