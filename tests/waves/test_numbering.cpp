#include <gtest/gtest.h>

#include <map>

#include "judge.h"
#include "wavefount/waves/chronology.h"
#include "wavefount/waves/fate.h"
#include "wavefount/waves/find_waves.h"
#include "wavefount/waves/numbering.h"

namespace wavefount::testing {
namespace {

/// Share of the entries of each true wave that carry the wave's commonest number, over all.
double agreement(const Scene& scene) {
  const auto measured = measure(scene, 1);
  std::map<int, int> number_of;
  for (const auto& entry : measured.entries.entries) number_of[entry.interphase] = entry.cycle;
  double right = 0, all = 0;
  int last = 0;
  for (const auto& truth : scene.waves) {
    std::map<int, int> counts;
    for (const int interphase : truth.interphases) ++counts[number_of[interphase]];
    const auto most = std::max_element(counts.begin(), counts.end(),
                                       [](auto& a, auto& b) { return a.second < b.second; });
    EXPECT_EQ(most->first, last + 1);
    last = most->first;
    right += most->second;
    all += static_cast<double>(truth.interphases.size());
  }
  return right / all;
}

TEST(Numbering, MissingAndExtraEntriesAreSeenAsSuch) {
  for (std::uint64_t seed = 1; seed <= 5; ++seed) {
    SceneOptions options;
    options.cycles = 7;
    options.missing_share = 0.15;
    options.extra_share = 0.05;
    options.seed = seed;
    EXPECT_GE(agreement(make_scene(options)), 0.97) << seed;
  }
}

TEST(Numbering, AGrowingPeriodIsFollowed) {
  SceneOptions options;
  options.cycles = 9;
  options.period_growth = 0.15;
  options.missing_share = 0.1;
  EXPECT_GE(agreement(make_scene(options)), 0.99);
}

TEST(Numbering, WavesUnderWayTogetherAreToldApart) {
  SceneOptions options;
  options.cycles = 8;
  options.length_um = 3000;
  options.speed_um_per_min = 16;  // 190 minutes from end to end, a wave every 35
  EXPECT_GE(agreement(make_scene(options)), 0.99);
}

TEST(Numbering, ModeOfASampleWithMultiplesAndFractions) {
  EXPECT_NEAR(half_sample_mode({30, 31, 29.5, 60, 62, 30.4, 15, 14, 30.1, 90}), 30.2, 0.5);
  EXPECT_EQ(half_sample_mode({}), 0);
}

TEST(Numbering, NothingComesOfNothing) {
  Scene scene;
  scene.tube = straight_tube(1000, 100);
  scene.times_min = {0};
  const auto measured = measure(scene, 1);
  EXPECT_TRUE(measured.entries.entries.empty());
  EXPECT_TRUE(measured.waves.waves.empty());
}

TEST(Numbering, NucleiAtOnePlaceAndATubeWithoutOutlineDoNoHarm) {
  auto scene = make_scene({.cycles = 2});
  scene.tube = {};
  for (auto& interphase : scene.interphases.interphases) interphase.place_um = {100, 100};
  for (auto& nucleus : scene.nuclei.nuclei)
    for (auto& point : nucleus.points) point.x_um = point.y_um = 100;
  const auto measured = measure(scene, 1);
  for (const auto& wave : measured.waves.waves)
    for (const auto& origin : wave.origins) EXPECT_FALSE(origin.claimed);
}

Fate fate_with(Scene scene, double film_end, bool again) {
  if (!again) {
    std::erase_if(scene.interphases.interphases,
                  [](const Interphase& one) { return one.outcome == Outcome::unfinished; });
    for (auto& nucleus : scene.nuclei.nuclei) nucleus.points.resize(1);
  }
  scene.times_min.back() = film_end;
  return measure(scene, 1).waves.waves.front().fate;
}

TEST(Fate, FollowsFromWhatFormsAgain) {
  const auto scene = make_scene({.cycles = 1});
  EXPECT_EQ(fate_with(scene, 400, true), Fate::confirmed);
  EXPECT_EQ(fate_with(scene, 400, false), Fate::terminal);
  EXPECT_EQ(fate_with(scene, 30, false), Fate::unconfirmed);
}

TEST(Fate, ATerminalWaveHasNoSpeedAndClaimsNoOrigin) {
  auto scene = make_scene({.cycles = 1});
  std::erase_if(scene.interphases.interphases,
                [](const Interphase& one) { return one.outcome == Outcome::unfinished; });
  for (auto& nucleus : scene.nuclei.nuclei) nucleus.points.resize(1);
  const auto wave = measure(scene, 1).waves.waves.front();
  EXPECT_FALSE(wave.slowness);
  EXPECT_TRUE(wave.review);
  for (const auto& origin : wave.origins) EXPECT_FALSE(origin.claimed);
}

}  // namespace
}  // namespace wavefount::testing
