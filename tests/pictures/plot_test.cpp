#include "wavefount/pictures/plot.h"

#include <gtest/gtest.h>

#include <cmath>
#include <limits>

namespace wavefount {
namespace {

TEST(RoundTicks, AreRoundAndInside) {
  EXPECT_EQ(round_ticks({0, 100}, 5), (std::vector<double>{0, 20, 40, 60, 80, 100}));
  EXPECT_EQ(round_ticks({-3, 3}, 3), (std::vector<double>{-2, 0, 2}));
  for (const double span : {1e-6, 0.3, 7.0, 59.0, 3141.0, 1e9}) {
    const auto ticks = round_ticks({0, span}, 6);
    EXPECT_GE(ticks.size(), 4U) << span;
    EXPECT_LE(ticks.size(), 11U) << span;
  }
}

TEST(RoundTicks, SurviveRangesWithoutSpan) {
  EXPECT_EQ(round_ticks({5, 5}, 6).size(), 1U);
  EXPECT_EQ(round_ticks({0, std::nan("")}, 6).size(), 1U);
}

TEST(RoundBelow, IsOneTwoOrFive) {
  EXPECT_DOUBLE_EQ(round_below(260), 200);
  EXPECT_DOUBLE_EQ(round_below(0.07), 0.05);
  EXPECT_DOUBLE_EQ(round_below(1), 1);
  EXPECT_DOUBLE_EQ(round_below(0), 1);
  EXPECT_DOUBLE_EQ(round_below(std::numeric_limits<double>::infinity()), 1);
}

TEST(Canvas, CutsTextThatIsTooWide) {
  Canvas canvas(200, 50);
  const auto cut = canvas.fitted("été été été été été été été", 20, 100);
  EXPECT_LE(canvas.text_width(cut, 20), 100);
  EXPECT_TRUE(cut.ends_with("…"));
  EXPECT_EQ(canvas.fitted("ok", 20, 100), "ok");
}

}  // namespace
}  // namespace wavefount
