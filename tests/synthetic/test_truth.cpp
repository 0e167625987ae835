#include <gtest/gtest.h>

#include <algorithm>

#include "scenes.h"
#include "wavefount/synthetic/truth.h"

namespace wavefount {
namespace {

std::vector<TruthWave> whole_waves(const Scene& scene) {
  auto waves = truth_waves(scene);
  std::erase_if(waves, [](const TruthWave& wave) { return !wave.complete; });
  return waves;
}

TEST(TruthWaves, OneSourceInsideIsASingleOrigin) {
  const Scene scene = build_scene(small_recipe());
  const auto waves = whole_waves(scene);
  ASSERT_GE(waves.size(), 1u);
  for (const auto& wave : waves) {
    EXPECT_EQ(wave.answer, Answer::single);
    ASSERT_EQ(wave.origins.size(), 1u);
    EXPECT_TRUE(wave.origins[0].judged);
    EXPECT_EQ(wave.origins[0].site, Site::interior);
    EXPECT_EQ(wave.origins[0].basin_nuclei, static_cast<int>(scene.nuclei.size()));
  }
}

TEST(TruthWaves, TwoSourcesCoexistWhereTheLaterIsProminent) {
  auto recipe = small_recipe();
  recipe.view_um = 1800;
  recipe.sources = {{0.2, 0, 10, 42}, {0.8, 0, 16, 42}};
  const Scene scene = build_scene(recipe);
  const auto waves = whole_waves(scene);
  ASSERT_GE(waves.size(), 1u);
  EXPECT_EQ(waves[0].answer, Answer::coexisting);
  ASSERT_EQ(waves[0].origins.size(), 2u);
  EXPECT_FALSE(waves[0].origins[0].prominence_min);
  const double apart = std::abs(scene.sources[0].along_um - scene.sources[1].along_um);
  EXPECT_NEAR(*waves[0].origins[1].prominence_min, (apart / scene.waves.speed_um_per_min - 6) / 2,
              0.3);
}

TEST(TruthWaves, AFrontFromOutsideClaimsNoOrigin) {
  auto recipe = small_recipe();
  recipe.left_end = Boundary::open;
  recipe.sources = {{-0.1, 0, 12, 40}};
  const auto waves = whole_waves(build_scene(recipe));
  ASSERT_GE(waves.size(), 1u);
  EXPECT_EQ(waves[0].answer, Answer::enters_view);
  for (const auto& origin : waves[0].origins) EXPECT_FALSE(origin.judged);
}

TEST(TruthWaves, TogetherIsSynchronousAndHasNoSpeed) {
  auto recipe = small_recipe();
  recipe.waves.together = true;
  recipe.waves.jitter_min = 0.02;
  const auto waves = whole_waves(build_scene(recipe));
  ASSERT_GE(waves.size(), 1u);
  EXPECT_EQ(waves[0].answer, Answer::synchronous);
  EXPECT_FALSE(waves[0].speed_um_per_min);
  EXPECT_FALSE(waves[0].travelling);
}

TEST(TruthWaves, ConfirmedUnlessNucleiAreNotSeenToReform) {
  auto recipe = small_recipe();
  recipe.waves.arrest = true;
  recipe.waves.arrest_cycle = 2;
  const auto waves = whole_waves(build_scene(recipe));
  ASSERT_EQ(waves.size(), 2u);
  EXPECT_EQ(waves[0].fate, Fate::confirmed);
  EXPECT_EQ(waves[1].fate, Fate::terminal);
  EXPECT_FALSE(waves[1].travelling);
  EXPECT_FALSE(waves[1].answer);
  recipe.frames = 90;  // the film ends 6 minutes after the last entry
  EXPECT_EQ(truth_waves(build_scene(recipe)).back().fate, Fate::unconfirmed);
}

TEST(TruthWaves, AnEmptyTubeHasNone) {
  auto recipe = small_recipe();
  recipe.spacing_um = 0;
  EXPECT_TRUE(truth_waves(build_scene(recipe)).empty());
}

TEST(Showing, FaintYoungBrightGrownGoneAfterRelease) {
  const Scene scene = lone_nucleus();
  const auto& life = scene.nuclei[0].lives[0];
  EXPECT_EQ(showing(scene, life, 0), Showing::yes);
  EXPECT_EQ(showing(scene, life, 20), Showing::yes);    // entry, nothing lost yet
  EXPECT_EQ(showing(scene, life, 21), Showing::faint);  // half a minute later a haze is left
  EXPECT_EQ(showing(scene, life, 39), Showing::no);
  SceneLife young = life;
  young.formed_min = 4.9;
  young.entry_min = 40;
  EXPECT_EQ(showing(scene, young, 9), Showing::no);
  EXPECT_EQ(showing(scene, young, 10), Showing::faint);
  EXPECT_EQ(showing(scene, young, 20), Showing::yes);
}

TEST(EntryCounts, NotAtTheFilmsEdgesNorForTheDying) {
  const Scene scene = lone_nucleus();
  SceneLife life = scene.nuclei[0].lives[0];
  EXPECT_TRUE(entry_counts(scene, life));
  life.entry_min = 0.7;
  EXPECT_FALSE(entry_counts(scene, life));
  life.entry_min = 19.2;
  EXPECT_FALSE(entry_counts(scene, life));
  life.entry_min = 10;
  life.dies = true;
  life.fade_min = 4;
  EXPECT_FALSE(entry_counts(scene, life));
}

TEST(TruthTables, HaveACellForEveryColumn) {
  for (const auto& table : truth_tables(build_scene(small_recipe()))) {
    EXPECT_FALSE(table.rows.empty()) << table.name;
    for (const auto& row : table.rows) EXPECT_EQ(row.size(), table.columns.size()) << table.name;
  }
}

}  // namespace
}  // namespace wavefount
