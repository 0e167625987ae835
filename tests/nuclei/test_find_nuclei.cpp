#include <gtest/gtest.h>

#include <cmath>

#include "small_scene.h"
#include "wavefount/core/problem.h"

namespace wavefount::nuclei {
namespace {

int candidates_in(SmallScene scene, int frames) {
  int count = 0;
  for (int i = 0; i < frames; ++i) {
    scene.seed += 11;
    count += static_cast<int>(detect(scene, *scene.frame()).candidates.size());
  }
  return count;
}

TEST(FindNuclei, AnEmptyTubeHasNoCandidatesAtAnyExposure) {
  for (const double light : {0.05, 1.0, 20.0}) {
    SmallScene scene;
    scene.cytoplasm = 200 * light;
    scene.outside = 20 * light;
    EXPECT_LE(candidates_in(scene, 6), 1) << "light " << light;
  }
}

TEST(FindNuclei, ACameraModelThatIsOffDoesNotRaiseFalseAlarms) {
  SmallScene scene;
  scene.wall_px = 0;
  auto frame = scene.frame();
  CameraModel wrong = scene.camera();
  wrong.gain_electrons_per_count *= 9;
  wrong.read_noise_electrons *= 3;
  const auto found = find_nuclei(*scene.reduced(*frame), scene.mask(), wrong, scene.pixel_um, {});
  EXPECT_LE(found.candidates.size(), 1U);
}

TEST(FindNuclei, FindsEveryNucleusNearItsPlaceAndRadius) {
  SmallScene scene;
  scene.scatter(25, 15, 60);
  const auto frame = scene.frame();
  const auto compared = compare(scene, detect(scene, *frame).candidates);
  EXPECT_EQ(compared.missed, 0);
  EXPECT_LT(compared.place_error_px, 2);
  EXPECT_LT(std::abs(compared.radius_bias), 0.15);
}

TEST(FindNuclei, FindsANucleusThatTheImageBorderCuts) {
  SmallScene scene;
  scene.nuclei.push_back({1, 150, 15, 200});
  const auto found = detect(scene, *scene.frame());
  ASSERT_EQ(found.candidates.size(), 1U);
  EXPECT_TRUE(std::isfinite(found.candidates[0].x_px));
  EXPECT_NEAR(found.candidates[0].y_px, 150, 3);
}

TEST(FindNuclei, NothingOutsideOfTheTubeOrInABubble) {
  SmallScene scene;
  scene.nuclei = {{300, 20, 12, 300}, {200, 150, 15, 300}};
  Tubes tubes = scene.tubes();
  Polygon bubble;
  for (int i = 0; i < 24; ++i)
    bubble.push_back({(200 + 30 * std::cos(i * M_PI / 12)) * scene.pixel_um,
                      (150 + 30 * std::sin(i * M_PI / 12)) * scene.pixel_um});
  tubes.tubes[0].holes_um.push_back(bubble);
  const TubeMask mask(tubes, scene.grid(), scene.pixel_um, 0, 0);
  const auto frame = scene.frame();
  const auto found = find_nuclei(*scene.reduced(*frame), mask, scene.camera(), scene.pixel_um, {});
  EXPECT_TRUE(found.candidates.empty());
}

TEST(FindNuclei, FlatAndBlackFramesAreQuiet) {
  SmallScene scene;
  auto flat = make_image(scene.grid().width, scene.grid().height);
  for (const float level : {0.0F, 100.0F, 65535.0F}) {
    flat->FillBuffer(level);
    EXPECT_TRUE(
        find_nuclei(*flat, scene.mask(), scene.camera(), scene.pixel_um, {}).candidates.empty());
    CameraModel noiseless;
    EXPECT_TRUE(find_nuclei(*flat, scene.mask(), noiseless, scene.pixel_um, {}).candidates.empty());
  }
}

TEST(FindNuclei, AFrameOfAnotherSizeIsRefused) {
  SmallScene scene;
  EXPECT_THROW(find_nuclei(*make_image(5, 5), scene.mask(), scene.camera(), scene.pixel_um, {}),
               Problem);
}

}  // namespace
}  // namespace wavefount::nuclei
