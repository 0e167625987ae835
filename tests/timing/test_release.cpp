#include <gtest/gtest.h>

#include <cmath>

#include "simulated_film.h"
#include "wavefount/timing/release.h"

namespace wavefount {
namespace {

TEST(Release, disc_agrees_with_a_sum_over_clouds) {
  const auto clouds = simulated::disc_by_clouds(1);
  for (const double tau : {0.001, 0.01, 0.1, 0.5, 2.0, 20.0})
    EXPECT_NEAR(disc_share(tau), clouds(tau), 2e-3 * clouds(tau) + 1e-4) << tau;
}

TEST(Release, tails_have_their_powers) {
  EXPECT_NEAR(disc_share(2000) / disc_share(1000), std::pow(2, -1.0), 1e-3);
  EXPECT_NEAR(sphere_share(2000) / sphere_share(1000), std::pow(2, -1.5), 1e-3);
  EXPECT_NEAR(disc_share(1000), 1 / 4000.0, 1e-6);
  // A point of the sphere's whole content: volume over (4πτ)^(3/2).
  EXPECT_NEAR(sphere_share(1000) / (4 * M_PI / 3 / std::pow(4 * M_PI * 1000, 1.5)), 1, 1e-2);
}

TEST(Release, shares_fall_from_one_without_a_step) {
  for (auto* share : {disc_share, sphere_share}) {
    double before = 1;
    for (double tau = 1e-6; tau < 1e4; tau *= 1.1) {
      const double now = share(tau);
      EXPECT_LT(now, before) << tau;
      EXPECT_GT(now, 0.8 * before) << tau;
      before = now;
    }
  }
}

ReleaseCurve curve(double diffusion, double time, Permeabilisation kind, double width = 0,
                   double length = 60, double step = 0.002) {
  return {{diffusion, time, kind}, {Optics::widefield, width}, 10, length, step};
}

TEST(Release, walls_turn_the_tail_into_a_square_root) {
  const auto narrow = curve(3000, 1e-4, Permeabilisation::exponential, 100, 5000, 0.5);
  EXPECT_NEAR(narrow.at(4000) / narrow.at(1000), 0.5, 0.02);
  const auto wide = curve(3000, 1e-4, Permeabilisation::exponential, 0, 5000, 0.5);
  EXPECT_NEAR(wide.at(4000) / wide.at(1000), 0.25, 0.01);
  EXPECT_NEAR(narrow.at(0.5), wide.at(0.5), 0.03);
}

TEST(Release, permeabilisation_alone_is_exponential_or_straight) {
  const auto exponential = curve(1e9, 0.5, Permeabilisation::exponential);
  EXPECT_NEAR(exponential.at(0.5), std::exp(-1.0), 5e-3);
  const auto straight = curve(1e9, 0.5, Permeabilisation::linear);
  EXPECT_NEAR(straight.at(0.25), 0.5, 5e-3);
  EXPECT_NEAR(straight.half_min(), 0.25, 5e-3);
}

TEST(Release, agrees_with_a_sum_over_pores_and_clouds) {
  const auto summed = simulated::pores_then_clouds(0.3, 0.5);
  const auto tabulated = curve(100 / 0.5, 0.3, Permeabilisation::exponential);
  for (const double time : {0.05, 0.2, 0.6, 1.5, 5.0})
    EXPECT_NEAR(tabulated.at(time), summed(time), 3e-3) << time;
}

TEST(Release, exposure_is_the_mean_over_it) {
  const auto release = curve(400, 0.2, Permeabilisation::exponential);
  double sum = 0;
  for (int i = 0; i < 1000; ++i) sum += release.at(-0.3 + 0.8 * (i + 0.5) / 1000);
  EXPECT_NEAR(release.mean(-0.3, 0.5), sum / 1000, 1e-4);
  EXPECT_EQ(release.mean(-2, -1), 1);
}

}  // namespace
}  // namespace wavefount
