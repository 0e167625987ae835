#include <gtest/gtest.h>

#include "wavefount/core/robust.h"

namespace wavefount {
namespace {

TEST(Robust, QuantilesInterpolateLinearly) {
  EXPECT_EQ(median({3, 1, 2}), 2);
  EXPECT_EQ(median({4, 1, 3, 2}), 2.5);
  EXPECT_EQ(median({}), 0);
  // Definition 7 of Hyndman & Fan (1996, Am. Stat. 50:361), worked by hand.
  EXPECT_DOUBLE_EQ(quantile({10, 20, 30, 40, 50}, 0.1), 14);
  EXPECT_DOUBLE_EQ(quantile({10, 20, 30, 40, 50}, 1), 50);
}

TEST(Robust, SpreadIgnoresOutliers) {
  EXPECT_DOUBLE_EQ(robust_sd({1, 2, 3, 4, 5}), 1.4826);
  EXPECT_DOUBLE_EQ(robust_sd({1, 2, 3, 4, 1e9}), 1.4826);
}

}  // namespace
}  // namespace wavefount
