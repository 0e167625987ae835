#include <gtest/gtest.h>

#include <cmath>

#include "wavefount/synthetic/blurred_disc.h"

namespace wavefount {
namespace {

/// Light within a distance from the centre, by the midpoint rule over rings.
double light_within(const BlurredDisc& disc, double distance) {
  constexpr int rings = 4000;
  double sum = 0;
  for (int i = 0; i < rings; ++i) {
    const double r = (i + 0.5) * distance / rings;
    sum += disc.at(r) * 2 * M_PI * r * distance / rings;
  }
  return sum;
}

TEST(ScaledBessel, AgreesWithTheStandardLibrary) {
  for (const double x : {0.01, 0.5, 1.0, 3.7, 3.8, 10.0, 60.0}) {
    EXPECT_NEAR(scaled_bessel_i0(x), std::cyl_bessel_i(0, x) * std::exp(-x), 3e-7) << x;
    EXPECT_NEAR(scaled_bessel_i1(x), std::cyl_bessel_i(1, x) * std::exp(-x), 3e-7) << x;
  }
}

TEST(BlurredDisc, CentreHasItsClosedForm) {
  for (const double sigma : {0.5, 2.0, 8.0, 30.0})
    EXPECT_NEAR((BlurredDisc{12, sigma, 0}).at(0), 1 - std::exp(-12 * 12 / (2 * sigma * sigma)),
                1e-5);
}

TEST(BlurredDisc, KeepsItsLight) {
  for (const double sigma : {1.0, 5.0, 20.0})
    for (const double dome : {0.0, 0.4}) {
      const BlurredDisc disc{12, sigma, dome};
      EXPECT_NEAR(light_within(disc, 12 + 7 * sigma) / (M_PI * 12 * 12), 1, 1e-3);
    }
}

TEST(BlurredDisc, ShareLeftInTheDiscFollowsTheDiffusionSolution) {
  constexpr double radius = 14;
  constexpr double diffusion = 250;
  for (const double minutes : {0.02, 0.1, 0.3, 1.0, 3.0, 10.0}) {
    const double sigma = std::sqrt(2 * diffusion * minutes);
    const double left = light_within({radius, sigma, 0}, radius) / (M_PI * radius * radius);
    EXPECT_NEAR(left, share_left_in_disc(diffusion * minutes / (radius * radius)), 2e-4) << minutes;
  }
}

TEST(BlurredDisc, TailFallsAsOneOverTime) {
  const double early = share_left_in_disc(40);
  const double late = share_left_in_disc(80);
  EXPECT_NEAR(early / late, 2, 0.02);
  EXPECT_NEAR(early, 1 / (4 * 40.0), 1e-4);
}

TEST(RadialTable, ReadsBackWhatWentIn) {
  const BlurredDisc disc{12, 2, 0.25};
  RadialTable table(30);
  table.add(disc, 3);
  for (const double r : {0.0, 5.0, 11.3, 12.0, 14.7, 25.0})
    EXPECT_NEAR(table.at(r), 3 * disc.at(r), 5e-3) << r;
  EXPECT_EQ(table.at(31), 0);
}

}  // namespace
}  // namespace wavefount
