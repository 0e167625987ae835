#include "wavefount/tube/section.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

namespace wavefount::tube {
namespace {

struct Section {
  double tilt = 0, roundness = 0, line = 0, line_width = 2;
};

/// Profile with its true edge at `edge` against a half-height position at zero.
EdgeProfile drawn(const Section& section, double half, double edge) {
  EdgeProfile profile;
  profile.half_width = half - edge;
  profile.first = -0.9 * *profile.half_width;
  for (double at = profile.first; at <= 14; at += profile.step) {
    const double step = 0.5 * std::erfc((at - edge) / (1.3 * std::sqrt(2.0)));
    const double u = std::clamp((at - edge + half) / half, -1.0, 1.0);
    const double chord = std::sqrt(1 - u * u);
    const double away = (at - edge) / section.line_width;
    profile.values.push_back(step * (1 - section.roundness + section.roundness * chord) *
                                 (1 + section.tilt * u) +
                             section.line * std::exp(-0.5 * away * away));
  }
  return profile;
}

TEST(Section, PlainAndTiltedEdgesStay) {
  EXPECT_EQ(edge_offset(drawn({}, 40, 0)), 0);
  EXPECT_NEAR(edge_offset(drawn({0.1}, 40, 0)), 0, 0.3);
  EXPECT_NEAR(edge_offset(drawn({-0.1}, 40, 0)), 0, 0.3);
}

TEST(Section, GlowPushesTheHalfHeightOut) {
  EXPECT_NEAR(edge_offset(drawn({0, 0, 1.2, 2}, 40, -2.5)), -2.5, 0.4);
  EXPECT_NEAR(edge_offset(drawn({0.05, 0, 2, 3}, 40, -4)), -4, 0.5);
}

TEST(Section, RoundSectionPullsItIn) {
  EXPECT_NEAR(edge_offset(drawn({0, 1, 0}, 40, 3)), 3, 0.5);
}

TEST(Section, TooShortAProfileSaysNothing) {
  EdgeProfile profile;
  profile.values = {1, 0.5, 0};
  EXPECT_EQ(edge_offset(profile), 0);
}

}  // namespace
}  // namespace wavefount::tube
