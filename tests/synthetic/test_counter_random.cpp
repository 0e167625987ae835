#include <gtest/gtest.h>

#include <cmath>

#include "wavefount/synthetic/counter_random.h"

namespace wavefount {
namespace {

TEST(CounterRandom, DependsOnSeedStreamAndCounterAlone) {
  const CounterRandom one(7, 3);
  const CounterRandom same(7, 3);
  EXPECT_EQ(one.bits(99), same.bits(99));
  EXPECT_NE(one.bits(99), one.bits(100));
  EXPECT_NE(one.bits(99), CounterRandom(8, 3).bits(99));
  EXPECT_NE(one.bits(99), CounterRandom(7, 4).bits(99));
}

TEST(CounterRandom, NormalNumbersHaveNormalMomentsAndNoMemory) {
  const CounterRandom random(11);
  constexpr int count = 200000;
  double first = 0, second = 0, third = 0, fourth = 0, next = 0;
  for (int i = 0; i < count; ++i) {
    const double z = random.normal(static_cast<std::uint64_t>(i));
    first += z;
    second += z * z;
    third += z * z * z;
    fourth += z * z * z * z;
    next += z * random.normal(static_cast<std::uint64_t>(i) + 1);
  }
  // Four standard errors of each moment.
  const double unit = 4 / std::sqrt(static_cast<double>(count));
  EXPECT_NEAR(first / count, 0, unit);
  EXPECT_NEAR(second / count, 1, unit * std::sqrt(2));
  EXPECT_NEAR(third / count, 0, unit * std::sqrt(15));
  EXPECT_NEAR(fourth / count, 3, unit * std::sqrt(96));
  EXPECT_NEAR(next / count, 0, unit);
}

TEST(NormalQuantile, InvertsTheDistributionFunction) {
  for (const double z : {-4.0, -2.2, -0.5, 0.0, 1.0, 1.96, 3.5})
    EXPECT_NEAR(normal_quantile(0.5 * std::erfc(-z / std::sqrt(2.0))), z, 1e-6);
}

}  // namespace
}  // namespace wavefount
