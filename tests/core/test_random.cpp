#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "wavefount/core/random.h"

namespace wavefount {
namespace {

TEST(Random, QuantilesAgreeWithTheTableOfTheNormalDistribution) {
  // Two-sided 95 %, 99 % and 99.9 % points as every printed table gives them (from memory).
  EXPECT_NEAR(normal_quantile(0.975), 1.959963984540054, 1e-12);
  EXPECT_NEAR(normal_quantile(0.995), 2.575829303548901, 1e-12);
  EXPECT_NEAR(normal_quantile(0.0005), -3.290526731491926, 1e-12);
  EXPECT_NEAR(normal_quantile(0.5), 0, 1e-15);
}

TEST(Random, QuantileInvertsTheDistribution) {
  // Above 3 the share itself, near 1, no longer tells neighbouring quantiles apart.
  for (double z = -7; z <= 3; z += 0.25) {
    const double share = 0.5 * std::erfc(-z / std::numbers::sqrt2);
    EXPECT_NEAR(normal_quantile(share), z, 1e-11) << z;
  }
}

TEST(Random, StreamsAreReproducibleAndDiffer) {
  RandomStream first(seed_from(1, "tube A"));
  RandomStream again(seed_from(1, "tube A"));
  RandomStream other(seed_from(1, "tube B"));
  EXPECT_EQ(first.bits(), again.bits());
  EXPECT_NE(first.bits(), other.bits());
}

TEST(Random, NormalsHaveTheMomentsOfTheNormalDistribution) {
  RandomStream stream(7);
  constexpr int draws = 200000;
  double sum = 0;
  double squares = 0;
  double fourth = 0;
  for (int i = 0; i < draws; ++i) {
    const double z = stream.normal();
    sum += z;
    squares += z * z;
    fourth += z * z * z * z;
  }
  // Tolerances are five standard errors.
  EXPECT_NEAR(sum / draws, 0, 5 / std::sqrt(draws));
  EXPECT_NEAR(squares / draws, 1, 5 * std::sqrt(2.0 / draws));
  EXPECT_NEAR(fourth / draws, 3, 5 * std::sqrt(96.0 / draws));
}

}  // namespace
}  // namespace wavefount
