#include <gtest/gtest.h>

#include <cmath>

#include "wavefount/nuclei/disc_edge.h"

namespace wavefount::nuclei {
namespace {

TEST(DiscEdge, ASharpDiscLosesNothing) {
  const DiscEdge sharp = disc_edge(0);
  EXPECT_DOUBLE_EQ(sharp.half_radius, 1);
  EXPECT_DOUBLE_EQ(sharp.mean_inside, 1);
}

TEST(DiscEdge, AgreesWithTheSeriesForLittleBlur) {
  // A straight edge under a Gaussian blur s loses s / √(2π) a unit length inside; the curvature
  // moves the half-maximum inwards by s² / 2.
  const DiscEdge disc = disc_edge(0.1);
  EXPECT_NEAR(disc.mean_inside, 1 - 2 * 0.1 / std::sqrt(2 * M_PI), 0.006);
  EXPECT_NEAR(disc.half_radius, 1 - 0.005, 0.0005);
  EXPECT_NEAR(disc.edge, 0.1, 0.003);
}

TEST(DiscEdge, TheEdgeTellsTheBlur) {
  for (const double blur : {0.05, 0.2, 0.35, 0.5}) {
    const DiscEdge disc = disc_edge(blur);
    EXPECT_NEAR(disc_with_edge(disc.edge).blur, blur, 0.01);
    EXPECT_NEAR(disc_with_edge(disc.edge).half_radius, disc.half_radius, 0.005);
  }
}

}  // namespace
}  // namespace wavefount::nuclei
