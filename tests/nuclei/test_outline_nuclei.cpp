#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <opencv2/imgproc.hpp>

#include "small_scene.h"
#include "wavefount/nuclei/region_growing.h"

namespace wavefount::nuclei {
namespace {

struct Limits {
  double f1 = 0.99, radius = 0.05, brightness = 0.03, jaccard = 0.85;
};

void expect_accurate(SmallScene scene, int count, double radius_px, double brightness,
                     const Limits& limits, double texture = 0) {
  int found = 0;
  int missed = 0;
  int invented = 0;
  for (int i = 0; i < 3; ++i) {
    scene.seed += 5;
    scene.nuclei.clear();
    scene.scatter(count, radius_px, brightness, 0.1);
    for (auto& nucleus : scene.nuclei) nucleus.texture = texture;
    const auto result = compare(scene, measure(scene, *scene.frame()));
    found += result.found;
    missed += result.missed;
    invented += result.invented;
    EXPECT_LT(std::abs(result.radius_bias), limits.radius);
    EXPECT_LT(std::abs(result.brightness_bias), limits.brightness);
    EXPECT_LT(std::abs(result.integrated_bias), 2 * limits.brightness);
    EXPECT_GT(result.jaccard, limits.jaccard);
  }
  EXPECT_GE(2.0 * found / (2 * found + missed + invented), limits.f1);
}

TEST(OutlineNuclei, CleanScene) {
  expect_accurate({}, 25, 15, 200, {});
}

TEST(OutlineNuclei, FromFourToTwentyMicrometresAtAnyPixelSize) {
  for (const double pixel_um : {0.3, 0.65, 1.0, 2.0}) {
    for (const double radius_um : {4.0, 8.0, 20.0}) {
      SCOPED_TRACE(testing::Message() << radius_um << " um at " << pixel_um << " um a pixel");
      SmallScene scene;
      scene.pixel_um = pixel_um;
      scene.psf_px = std::max(1 / pixel_um, 0.6);
      scene.wall_px = 20;
      scene.width = std::max(400, static_cast<int>(500 / pixel_um));
      scene.height = std::max(200, static_cast<int>(180 / pixel_um));
      scene.factor = std::max(1, static_cast<int>(4 / pixel_um / 2.5));
      Limits limits;
      if (radius_um / pixel_um < 6) limits = {0.97, 0.06, 0.15, 0.75};
      expect_accurate(scene, 10, radius_um / pixel_um, 200, limits);
    }
  }
}

TEST(OutlineNuclei, DimAndNoisy) {
  SmallScene scene;
  expect_accurate(scene, 25, 15, 40, {0.97, 0.05, 0.05, 0.85});
  scene.gain = 0.05;
  expect_accurate(scene, 25, 15, 100, {0.97, 0.05, 0.06, 0.85});
}

TEST(OutlineNuclei, EightBit) {
  SmallScene scene;
  scene.cytoplasm = 30;
  scene.outside = 3;
  scene.dark = 5;
  scene.gain = 2;
  scene.read_noise = 1;
  scene.most_counts = 255;
  expect_accurate(scene, 25, 15, 40, {});
}

TEST(OutlineNuclei, GlowingWallsVignettingAndDebris) {
  SmallScene scene;
  scene.vignetting = 0.3;
  scene.glow = 120;
  scene.debris = 8;
  expect_accurate(scene, 25, 15, 100, {0.97, 0.05, 0.15, 0.85});
}

TEST(OutlineNuclei, TexturedNucleiStayWhole) {
  expect_accurate({}, 25, 15, 200, {0.97, 0.05, 0.05, 0.85}, 0.15);
}

TEST(OutlineNuclei, TouchingNucleiAreParted) {
  SmallScene scene;
  for (int i = 0; i < 6; ++i) {
    const double x = 60 + i * 110;
    scene.nuclei.push_back({x, 90, 14, 200});
    scene.nuclei.push_back({x + 27 + i, 92, 14, 200});
    scene.nuclei.push_back({x, 200, 14, 200});
    scene.nuclei.push_back({x + 22 + i, 204, 9, 150});
  }
  const auto sightings = measure(scene, *scene.frame());
  const auto result = compare(scene, sightings);
  EXPECT_EQ(result.missed, 0);
  EXPECT_LE(result.invented, 1);
  EXPECT_GT(result.jaccard, 0.85);
  EXPECT_LT(std::abs(result.brightness_bias), 0.03);
  EXPECT_GT(std::count_if(sightings.begin(), sightings.end(),
                          [](const Sighting& one) { return one.split; }),
            5);
}

TEST(OutlineNuclei, AWideSoftCloudIsNoNucleus) {
  SmallScene scene;
  scene.nuclei.push_back({350, 150, 12, 3000});
  scene.psf_px = 25;
  EXPECT_TRUE(measure(scene, *scene.frame()).empty());
}

TEST(OutlineNuclei, FlagsBorderAndSaturation) {
  SmallScene scene;
  scene.most_counts = 1000;
  scene.nuclei = {{5, 150, 15, 300}, {300, 150, 15, 2000}, {500, 150, 15, 300}};
  auto sightings = measure(scene, *scene.frame());
  ASSERT_EQ(sightings.size(), 3U);
  std::sort(sightings.begin(), sightings.end(),
            [](const Sighting& a, const Sighting& b) { return a.x_px < b.x_px; });
  EXPECT_TRUE(sightings[0].touches_border);
  EXPECT_FALSE(sightings[1].touches_border);
  EXPECT_FALSE(sightings[0].saturated);
  EXPECT_TRUE(sightings[1].saturated);
  EXPECT_FALSE(sightings[2].saturated);
}

TEST(OutlineNuclei, BrightnessErrorsAreAsLargeAsTheVarianceSays) {
  SmallScene scene;
  scene.width = 1400;
  scene.height = 600;
  scene.scatter(60, 15, 150, 0.1);
  const auto result = compare(scene, measure(scene, *scene.frame()));
  EXPECT_GT(result.pull, 0.7);
  EXPECT_LT(result.pull, 1.6);
}

TEST(GrowRegions, FillsAHoleButNotAGapThatSeveralEnclose) {
  cv::Mat1f ring(40, 40, 0.0F);
  for (int y = 0; y < 40; ++y)
    for (int x = 0; x < 40; ++x) {
      const double distance = std::hypot(x - 20, y - 20);
      ring(y, x) = distance < 10 && distance > 2 ? 1.0F : 0.0F;
    }
  const auto labels = grow_regions(ring, {{20, 20, 10, 0.5, 1}});
  EXPECT_EQ(labels(20, 20), 0);
  EXPECT_EQ(labels(1, 1), -1);
}

}  // namespace
}  // namespace wavefount::nuclei
