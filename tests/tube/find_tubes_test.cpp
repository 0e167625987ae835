#include "wavefount/tube/find_tubes.h"

#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "tube_scene.h"
#include "wavefount/tube/scan_ahead.h"

namespace wavefount::tube {
namespace {

using testing::SceneTube;
using testing::TubeScene;

TubeScene small_scene() {
  TubeScene scene;
  scene.width = 640;
  scene.height = 300;
  scene.frames = 8;
  scene.tubes = {{320, 150, 0, 0, 460, 120}};
  return scene;
}

/// Two nuclei a third of the time, near the middle and near a wall.
void add_nuclei(TubeScene& scene) {
  const auto& tube = scene.tubes[0];
  for (int k = 0; k < 9; ++k) {
    const double along = (k - 4) * tube.length / 11;
    scene.blobs.push_back({tube.centre_x + along * std::cos(tube.angle),
                           tube.centre_y + along * std::sin(tube.angle) + (k % 3 - 1) * 25.0, 8,
                           350, k % 4, k % 4 + 4});
  }
}

Tubes find(const testing::SceneSource& source, bool automatic = true) {
  Messages messages;
  const auto scan = scan_ahead(source, {}, messages);
  TubeSettings settings;
  settings.automatic = automatic;
  return find_tubes(source.description(), scan.prescan, settings, messages);
}

/// Where the scene's axis ends, µm; the scene's pixel is one µm.
Point end_of(const SceneTube& tube, double side) {
  const double along = side * tube.length / 2;
  double u = along;
  double v = 0;
  if (tube.curvature != 0) {
    u = std::sin(along * tube.curvature) / tube.curvature;
    v = (1 - std::cos(along * tube.curvature)) / tube.curvature;
  }
  return {tube.centre_x + u * std::cos(tube.angle) - v * std::sin(tube.angle),
          tube.centre_y + u * std::sin(tube.angle) + v * std::cos(tube.angle)};
}

void expect_near(const Tube& found, const SceneTube& truth, double end_px = 2) {
  EXPECT_TRUE(found.measured);
  EXPECT_NEAR(found.width_um, truth.width, 0.02 * truth.width);
  const auto first = end_of(truth, -1);
  const auto last = end_of(truth, 1);
  EXPECT_LT(std::hypot(found.axis_um.front().x - first.x, found.axis_um.front().y - first.y),
            end_px);
  EXPECT_LT(std::hypot(found.axis_um.back().x - last.x, found.axis_um.back().y - last.y), end_px);
  EXPECT_NEAR(found.length_um, truth.length, end_px);
  for (const auto kind : {found.left_end, found.right_end, found.upper_wall, found.lower_wall})
    EXPECT_EQ(kind, Boundary::closed);
}

struct Case {
  const char* name;
  double angle, curvature, vignetting, glow, roundness, level;
  bool round_ends;
};

class TubeLooks : public ::testing::TestWithParam<Case> {};

TEST_P(TubeLooks, OutlineIsRight) {
  const auto& look = GetParam();
  auto scene = small_scene();
  auto& tube = scene.tubes[0];
  tube.angle = look.angle;
  tube.curvature = look.curvature;
  tube.glow = look.glow;
  tube.roundness = look.roundness;
  tube.level = look.level;
  tube.round_ends = look.round_ends;
  scene.vignetting = look.vignetting;
  if (look.level > 50) add_nuclei(scene);
  if (look.level < 50) scene.frames = 24;  // dim light needs the average of many
  const testing::SceneSource source(scene);
  const auto tubes = find(source);
  ASSERT_EQ(tubes.tubes.size(), 1U);
  // At a bend the end's place across depends on where the curve is last seen.
  expect_near(tubes.tubes[0], tube, look.curvature != 0 ? 3 : 2);
}

INSTANTIATE_TEST_SUITE_P(Scenes, TubeLooks,
                         ::testing::Values(Case{"Plain", 0, 0, 0, 0, 0, 200, false},
                                           Case{"Tilted", 0.11, 0, 0, 0, 0, 200, false},
                                           Case{"TiltedUpwards", -0.2, 0, 0.4, 0, 0, 200, false},
                                           Case{"Bent", 0, 0.001, 0, 0, 0, 200, false},
                                           Case{"BentUneven", 0.05, -0.0008, 0.4, 0, 0, 200, false},
                                           Case{"Vignetting", 0, 0, 0.6, 0, 0, 200, false},
                                           Case{"WallGlow", 0.03, 0, 0.2, 250, 0, 200, false},
                                           Case{"RoundEnds", 0, 0, 0, 0, 0, 200, true},
                                           Case{"RoundSection", 0.02, 0, 0, 0, 0.6, 200, false},
                                           Case{"Dim", 0.04, 0, 0.3, 0, 0, 10, false}),
                         [](const auto& one) { return std::string(one.param.name); });

TEST(FindTubes, UprightTubeStartsAtItsTop) {
  auto scene = small_scene();
  std::swap(scene.width, scene.height);
  scene.tubes = {{150, 320, 1.5, 0, 460, 120}};
  add_nuclei(scene);
  const testing::SceneSource source(scene);
  const auto tubes = find(source);
  ASSERT_EQ(tubes.tubes.size(), 1U);
  expect_near(tubes.tubes[0], scene.tubes[0]);
  EXPECT_LT(tubes.tubes[0].axis_um.front().y, tubes.tubes[0].axis_um.back().y);
}

TEST(FindTubes, EndsOutOfViewAreOpen) {
  auto scene = small_scene();
  scene.tubes = {{0, 150, 0.03, 0, 900, 120}};
  const testing::SceneSource source(scene);
  const auto tubes = find(source);
  ASSERT_EQ(tubes.tubes.size(), 1U);
  const auto& tube = tubes.tubes[0];
  EXPECT_EQ(tube.left_end, Boundary::open);
  EXPECT_EQ(tube.right_end, Boundary::closed);
  EXPECT_EQ(tube.upper_wall, Boundary::closed);
  EXPECT_NEAR(tube.width_um, 120, 2.4);
  EXPECT_NEAR(tube.axis_um.front().x, 0, 1);
  EXPECT_NEAR(tube.axis_um.back().x, 450 * std::cos(0.03), 2);
}

TEST(FindTubes, WallsOutOfViewAreOpen) {
  auto scene = small_scene();
  scene.tubes = {{0, 150, 0, 0, 900, 700}};
  scene.vignetting = 0.3;
  const testing::SceneSource source(scene);
  const auto tubes = find(source);
  ASSERT_EQ(tubes.tubes.size(), 1U);
  const auto& tube = tubes.tubes[0];
  EXPECT_EQ(tube.upper_wall, Boundary::open);
  EXPECT_EQ(tube.lower_wall, Boundary::open);
  EXPECT_EQ(tube.left_end, Boundary::open);
  EXPECT_EQ(tube.right_end, Boundary::closed);
  EXPECT_NEAR(tube.axis_um.back().x, 450, 2);
}

TEST(FindTubes, WithoutOutsideTheWholeFieldStandsForIt) {
  auto scene = small_scene();
  scene.tubes = {{320, 150, 0, 0, 2000, 1200}};
  scene.vignetting = 0.6;
  add_nuclei(scene);
  const testing::SceneSource source(scene);
  const auto tubes = find(source);
  ASSERT_EQ(tubes.tubes.size(), 1U);
  const auto& tube = tubes.tubes[0];
  EXPECT_FALSE(tube.measured);
  for (const auto kind : {tube.left_end, tube.right_end, tube.upper_wall, tube.lower_wall})
    EXPECT_EQ(kind, Boundary::open);
  EXPECT_NEAR(tube.area_um2(), 640 * 300, 1);
}

TEST(FindTubes, NothingIsLookedForWhenNotWanted) {
  const testing::SceneSource source(small_scene());
  const auto tubes = find(source, false);
  ASSERT_EQ(tubes.tubes.size(), 1U);
  EXPECT_FALSE(tubes.tubes[0].measured);
  EXPECT_TRUE(tubes.tubes[0].contains({2, 2}));
}

TEST(FindTubes, TubesSideBySideFromTopToBottom) {
  auto scene = small_scene();
  scene.tubes = {{320, 220, 0.02, 0, 500, 90}, {320, 75, 0, 0, 460, 100}};
  scene.tubes[0].level = 80;
  scene.vignetting = 0.3;
  const testing::SceneSource source(scene);
  const auto tubes = find(source);
  ASSERT_EQ(tubes.tubes.size(), 2U);
  EXPECT_EQ(tubes.tubes[0].index, 0);
  EXPECT_EQ(tubes.tubes[1].index, 1);
  expect_near(tubes.tubes[0], scene.tubes[1]);
  expect_near(tubes.tubes[1], scene.tubes[0]);
}

TEST(FindTubes, BubblesAreHolesAndDebrisIsNot) {
  auto scene = small_scene();
  scene.bubbles = {{220, 160, 26}};
  scene.blobs = {{500, 30, 14, 900}, {400, 150, 12, 500}};
  const testing::SceneSource source(scene);
  const auto tubes = find(source);
  ASSERT_EQ(tubes.tubes.size(), 1U);
  const auto& tube = tubes.tubes[0];
  ASSERT_EQ(tube.holes_um.size(), 1U);
  EXPECT_NEAR(std::abs(twice_signed_area(tube.holes_um[0])) / 2, std::numbers::pi * 26 * 26,
              0.1 * std::numbers::pi * 26 * 26);
  EXPECT_FALSE(tube.contains({220, 160}));
  EXPECT_TRUE(tube.contains({400, 150}));
  expect_near(tube, scene.tubes[0]);
}

TEST(FindTubes, SidecarWins) {
  testing::SceneSource source(small_scene());
  auto& overrides = source.edit().overrides;
  overrides.tube_width_um = 112;
  overrides.right_end = Boundary::open;
  overrides.exclude_um = {{{300, 140}, {340, 140}, {340, 160}, {300, 160}}};
  const auto tubes = find(source);
  ASSERT_EQ(tubes.tubes.size(), 1U);
  EXPECT_EQ(tubes.tubes[0].width_um, 112);
  EXPECT_EQ(tubes.tubes[0].right_end, Boundary::open);
  EXPECT_EQ(tubes.tubes[0].left_end, Boundary::closed);
  EXPECT_FALSE(tubes.tubes[0].contains({320, 150}));
  EXPECT_TRUE(tubes.tubes[0].contains({320, 190}));
}

TEST(FindTubes, OutlineOfTheSidecarIsTaken) {
  testing::SceneSource source(small_scene());
  source.edit().overrides.outline_um = {{120, 100}, {520, 100}, {520, 180}, {120, 180}};
  const auto tubes = find(source);
  ASSERT_EQ(tubes.tubes.size(), 1U);
  const auto& tube = tubes.tubes[0];
  EXPECT_NEAR(tube.area_um2(), 400 * 80, 1);
  EXPECT_NEAR(tube.width_um, 80, 2.5);
  EXPECT_NEAR(tube.axis_um.front().x, 120, 2.5);
  EXPECT_NEAR(tube.axis_um.back().x, 520, 2.5);
}

}  // namespace
}  // namespace wavefount::tube
