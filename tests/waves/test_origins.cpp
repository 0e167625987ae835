#include <gtest/gtest.h>

#include <cmath>

#include "judge.h"
#include "wavefount/waves/fronts.h"
#include "wavefount/waves/minima.h"
#include "wavefount/waves/order.h"
#include "wavefount/waves/sites.h"

namespace wavefount::testing {
namespace {

/// Two sources in a row of nine nuclei 100 µm apart at 0.1 min/µm, the second `delay` later.
SourceDraw two_sources(double delay) {
  SourceDraw draw;
  draw.places_um = {{100, 0}, {700, 0}};
  draw.starts_min = {0, delay};
  draw.slowness_min_per_um = 0.1;
  for (int i = 0; i < 9; ++i) {
    const double one = std::abs(100.0 * i - 100) * 0.1;
    const double two = delay + std::abs(100.0 * i - 700) * 0.1;
    draw.field_min.push_back(std::min(one, two));
    draw.source.push_back(one <= two ? 0 : 1);
  }
  return draw;
}

std::vector<Link> row(int count) {
  std::vector<Link> links;
  for (int i = 0; i + 1 < count; ++i) links.push_back({i, i + 1, 100, false});
  return links;
}

TEST(Minima, ProminenceIsTheWayToTheCollision) {
  const auto basins = find_minima(two_sources(10), row(9), 1);
  ASSERT_EQ(basins.minima.size(), 2U);
  EXPECT_FALSE(basins.minima[0].prominence);
  // Fronts meet where 0.1 (x − 100) = 10 + 0.1 (700 − x): at 450 µm after 35 minutes.
  EXPECT_NEAR(*basins.minima[1].prominence, 25, 1e-9);
  EXPECT_EQ(basins.basin.front(), 0);
  EXPECT_EQ(basins.basin.back(), 1);
}

TEST(Minima, AShallowOneBelongsToTheBasinItMeets) {
  const auto basins = find_minima(two_sources(10), row(9), 30);
  ASSERT_EQ(basins.minima.size(), 1U);
  EXPECT_EQ(basins.basin, std::vector<int>(9, 0));
}

TEST(Minima, ASaddleOnABridgeIsMarked) {
  auto links = row(9);
  links[4].bridge = true;
  const auto basins = find_minima(two_sources(0), links, 1);
  ASSERT_EQ(basins.minima.size(), 2U);
  EXPECT_TRUE(basins.minima[1].behind_gap);  // between nuclei 4 and 5 the fronts collide
}

TEST(Fronts, TheSpeedIntervalStaysHonestNearZeroSlowness) {
  const auto clear = slowness_with_speed(0.05, 0.005);
  EXPECT_NEAR(*clear.speed_um_per_min, 20, 1e-9);
  EXPECT_NEAR(*clear.speed_lo_um_per_min, 1 / (0.05 + 1.96 * 0.005), 0.01);
  EXPECT_NEAR(*clear.speed_hi_um_per_min, 1 / (0.05 - 1.96 * 0.005), 0.01);
  const auto open = slowness_with_speed(0.005, 0.005);
  EXPECT_FALSE(open.speed_um_per_min);
  EXPECT_TRUE(open.speed_lo_um_per_min);
  EXPECT_FALSE(open.speed_hi_um_per_min);
}

TEST(Order, PermutationsTellAFrontFromDisorder) {
  Arrivals front, disorder;
  const std::vector<double> dealt{3, 9, 1, 7, 0, 8, 2, 6, 4, 5};
  for (int i = 0; i < 10; ++i) {
    front.places_um.push_back({100.0 * i, 0});
    front.times_min.push_back(i);
    front.se_min.push_back(0.1);
  }
  disorder = front;
  disorder.times_min = dealt;
  const std::vector<char> none(10, 0);
  EXPECT_LT(order_p_value(front, none, row(10), 999, 5), 0.01);
  EXPECT_GT(order_p_value(disorder, none, row(10), 999, 5), 0.3);
}

TEST(Sites, FollowTheContract) {
  const auto tube = straight_tube(2000, 560);
  EXPECT_EQ(site_of(straight_place({100, 0}, tube), 150, true), Site::end);
  EXPECT_EQ(site_of(straight_place({1000, 220}, tube), 150, true), Site::wall);
  EXPECT_EQ(site_of(straight_place({1000, 220}, tube), 150, false), Site::interior);
  EXPECT_EQ(site_of(straight_place({1000, 0}, tube), 150, true), Site::interior);
}

TEST(Origins, TheSameSeedGivesTheSameAnswer) {
  const auto scene = make_scene({.kind = Kind::two, .cycles = 2, .seed = 4});
  const auto one = measure(scene, 7);
  const auto two = measure(scene, 7);
  ASSERT_EQ(one.waves.waves.size(), two.waves.waves.size());
  for (std::size_t i = 0; i < one.waves.waves.size(); ++i) {
    const auto& a = one.waves.waves[i];
    const auto& b = two.waves.waves[i];
    EXPECT_EQ(a.answer, b.answer);
    EXPECT_EQ(a.slowness->min_per_um, b.slowness->min_per_um);
    ASSERT_EQ(a.origins.size(), b.origins.size());
    for (std::size_t j = 0; j < a.origins.size(); ++j) {
      EXPECT_EQ(a.origins[j].along_um, b.origins[j].along_um);
      EXPECT_EQ(a.origins[j].probability, b.origins[j].probability);
    }
  }
}

TEST(Origins, FewNucleiNameTheirLeader) {
  const auto scene = make_scene({.length_um = 600, .jitter_min = 0.1, .timing_error_min = 0.05});
  ASSERT_LT(scene.nuclei.nuclei.size(), 5U);
  const auto measured = measure(scene, 1);
  ASSERT_FALSE(measured.waves.waves.empty());
  for (const auto& wave : measured.waves.waves) {
    EXPECT_EQ(wave.answer, Answer::too_few);
    EXPECT_FALSE(wave.review);
    ASSERT_EQ(wave.origins.size(), 1U);
    EXPECT_FALSE(wave.origins[0].claimed);
    EXPECT_EQ(wave.origins[0].nucleus, measured.entries.entries[wave.entries[0]].nucleus);
  }
}

TEST(Origins, TheLeaderLeadsAndThePassedGoWithTheFront) {
  const auto scene = make_scene({.speed_um_per_min = 20, .jitter_min = 0.1, .seed = 2});
  const auto measured = measure(scene, 1);
  const auto& wave = measured.waves.waves[1];
  ASSERT_EQ(wave.answer, Answer::single);
  int leads = 0, with_front = 0;
  for (const int at : wave.entries) {
    const auto& entry = measured.entries.entries[at];
    leads += entry.timing == Timing::leads;
    with_front += entry.timing == Timing::with_front;
    EXPECT_TRUE(entry.neighbour_delay_min);
  }
  EXPECT_LE(leads, 2);
  EXPECT_GE(with_front, static_cast<int>(wave.entries.size()) - 3);
  const auto& origin = wave.origins[0];
  EXPECT_TRUE(origin.chance_of_site && origin.chance_of_site_smooth);
  EXPECT_TRUE(origin.territory_percentile);
  EXPECT_TRUE(origin.period_ratio);
  EXPECT_NEAR(*origin.period_ratio, 1, 0.15);
}

TEST(Origins, AWaveUnderWayWhenTheFilmBeginsClaimsNone) {
  // Entries before minute 30 are cut off: the nuclei around the origin show none in this wave.
  auto scene = make_scene({.cycles = 3, .speed_um_per_min = 15, .jitter_min = 0.3, .seed = 5});
  std::erase_if(scene.interphases.interphases,
                [](const Interphase& one) { return one.entry && one.entry->time_min < 45; });
  for (auto& nucleus : scene.nuclei.nuclei)
    for (auto& point : nucleus.points) point.time_min = std::max(point.time_min, 45.0);
  std::erase_if(scene.times_min, [](double time) { return time < 45; });
  const auto measured = measure(scene, 1);
  for (const auto& origin : measured.waves.waves.front().origins) EXPECT_FALSE(origin.claimed);
}

}  // namespace
}  // namespace wavefount::testing
