#include <gtest/gtest.h>

#include <cmath>

#include "scenes.h"
#include "wavefount/core/problem.h"
#include "wavefount/synthetic/truth.h"

namespace wavefount {
namespace {

TEST(PointAt, InvertsThePlaceInATube) {
  for (const double bend : {0.0, 150.0}) {
    auto recipe = small_recipe();
    recipe.bend_um = bend;
    recipe.tilt_degrees = 3;
    const Scene scene = build_scene(recipe);
    const auto& tube = scene.tubes[0];
    for (const double along : {40.0, 333.0, 700.0})
      for (const double across : {-40.0, 0.0, 25.0}) {
        const auto back = tube.place(point_at(tube, along, across));
        // A bent axis is a polyline: at its corners the perpendicular jumps by a fraction of 1 µm.
        EXPECT_NEAR(back.along_um, along, bend > 0 ? 2 : 1e-6);
        EXPECT_NEAR(back.across_um, across, bend > 0 ? 0.2 : 1e-6);
      }
  }
}

TEST(PointAt, IsRightOfAnUprightTube) {
  Tube tube;
  tube.axis_um = {{100, 0}, {100, 500}};
  tube.length_um = 500;
  EXPECT_NEAR(point_at(tube, 100, 20).x, 120, 1e-9);
  EXPECT_NEAR(tube.place(point_at(tube, 100, 20)).across_um, 20, 1e-9);
}

TEST(BuildScene, KeepsNucleiApartAndInsideTheTube) {
  auto recipe = small_recipe();
  recipe.tube_width_um = 400;
  const Scene scene = build_scene(recipe);
  ASSERT_GT(scene.nuclei.size(), 10u);
  for (const auto& a : scene.nuclei) {
    EXPECT_TRUE(scene.tubes[0].contains(point_at(scene.tubes[0], a.along_um, a.across_um)));
    for (const auto& b : scene.nuclei) {
      if (a.number == b.number) continue;
      EXPECT_GE(std::hypot(a.along_um - b.along_um, a.across_um - b.across_um),
                recipe.spacing_um / 1.2);
    }
  }
  EXPECT_NEAR(median_spacing_um(scene, 0), recipe.spacing_um, 0.15 * recipe.spacing_um);
}

TEST(BuildScene, EntriesFollowTheFrontWithTheDeclaredJitter) {
  auto recipe = small_recipe();
  recipe.view_um = 6000;
  const Scene scene = build_scene(recipe);
  ASSERT_EQ(scene.sources.size(), 1u);
  const auto& source = scene.sources[0];
  double squares = 0;
  int count = 0;
  for (const auto& nucleus : scene.nuclei)
    for (const auto& life : nucleus.lives) {
      const double distance =
          std::hypot(nucleus.along_um - source.along_um, nucleus.across_um - source.across_um);
      const double front = source.first_min + (life.cycle - 1) * source.period_min +
                           distance / scene.waves.speed_um_per_min;
      squares += std::pow(life.entry_min - front, 2);
      ++count;
    }
  ASSERT_GT(count, 100);
  EXPECT_NEAR(std::sqrt(squares / count), scene.waves.jitter_min, 0.2 * scene.waves.jitter_min);
}

TEST(BuildScene, InterphasesFollowEachOtherAfterMitosis) {
  const Scene scene = build_scene(small_recipe());
  for (const auto& nucleus : scene.nuclei)
    for (std::size_t i = 0; i + 1 < nucleus.lives.size(); ++i) {
      EXPECT_EQ(nucleus.lives[i + 1].cycle, nucleus.lives[i].cycle + 1);
      EXPECT_GT(nucleus.lives[i + 1].formed_min, nucleus.lives[i].entry_min);
      const auto from = nucleus.lives[i].place_um;
      const auto to = nucleus.lives[i + 1].place_um;
      EXPECT_LT(std::hypot(to.x - from.x, to.y - from.y), 45);
    }
}

TEST(BuildScene, TheSameRecipeGivesTheSameScene) {
  const Scene one = build_scene(small_recipe());
  const Scene two = build_scene(small_recipe());
  ASSERT_EQ(one.nuclei.size(), two.nuclei.size());
  for (std::size_t i = 0; i < one.nuclei.size(); ++i) {
    EXPECT_EQ(one.nuclei[i].along_um, two.nuclei[i].along_um);
    EXPECT_EQ(one.nuclei[i].lives.size(), two.nuclei[i].lives.size());
  }
  auto other = small_recipe();
  other.seed = 43;
  EXPECT_NE(build_scene(other).nuclei[0].along_um, one.nuclei[0].along_um);
}

TEST(BuildScene, DroppedFramesAndIrregularStampsStillRise) {
  auto recipe = small_recipe();
  recipe.stamp_jitter = 0.4;
  recipe.dropped_share = 0.2;
  const Scene scene = build_scene(recipe);
  ASSERT_EQ(scene.frames(), recipe.frames);
  EXPECT_EQ(scene.times_min[0], 0);
  for (std::size_t i = 1; i < scene.times_min.size(); ++i)
    EXPECT_GT(scene.times_min[i], scene.times_min[i - 1]);
  EXPECT_GT(scene.times_min.back(), 1.1 * (recipe.frames - 1) * recipe.interval_min);
}

TEST(BuildScene, RefusesWhatLiesOutsideItsRanges) {
  for (const auto& spoil : std::vector<void (*)(SceneRecipe&)>{
           [](SceneRecipe& r) { r.frames = 0; }, [](SceneRecipe& r) { r.interval_min = 0; },
           [](SceneRecipe& r) { r.pixel_um = -1; }, [](SceneRecipe& r) { r.tube_width_um = 5; },
           [](SceneRecipe& r) { r.spacing_um = 10; }, [](SceneRecipe& r) { r.view_um = 1e9; },
           [](SceneRecipe& r) { r.interval_min = std::nan(""); }}) {
    auto recipe = small_recipe();
    spoil(recipe);
    EXPECT_THROW(build_scene(recipe), Problem);
  }
}

}  // namespace
}  // namespace wavefount
