#include "wavefount/tube/scan_ahead.h"

#include <gtest/gtest.h>

#include <cmath>
#include <limits>

#include "tube_scene.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/robust.h"
#include "wavefount/tube/frame_choice.h"

namespace wavefount::tube {
namespace {

testing::TubeScene scene_of(int frames) {
  testing::TubeScene scene;
  scene.width = 520;
  scene.height = 240;
  scene.frames = frames;
  scene.tubes = {{260, 120, 0.03, 0, 380, 100}};
  return scene;
}

/// Nuclei that all vanish in the second half and form again elsewhere.
void add_wave_of_nuclei(testing::TubeScene& scene) {
  for (int k = 0; k < 12; ++k) {
    scene.blobs.push_back({90.0 + 28 * k, 100.0 + 17 * (k % 3), 9, 400, 0, 7 + k % 3});
    scene.blobs.push_back({106.0 + 28 * k, 96.0 + 17 * (k % 4), 9, 400, 14 + k % 3, 1000});
  }
}

TEST(ScanAhead, DriftOfKeyframesWithAJump) {
  auto scene = scene_of(24);
  add_wave_of_nuclei(scene);
  for (int k = 0; k < scene.frames; ++k)
    scene.drift.push_back({0.35 * k + (k >= 13 ? 17.0 : 0.0), -0.2 * k - (k >= 13 ? 8.0 : 0.0)});
  const testing::SceneSource source(scene);
  Messages messages;
  const auto scan = scan_ahead(source, {}, messages).prescan;
  ASSERT_EQ(scan.frames.size(), 24U);
  std::vector<double> errors;
  for (std::size_t k = 0; k < scan.frames.size(); ++k) {
    const auto truth = scene.drift[static_cast<std::size_t>(scan.frames[k])];
    errors.push_back(std::hypot(scan.shift_x_px[k] - truth.x, scan.shift_y_px[k] - truth.y));
  }
  EXPECT_LT(median(errors), 0.2);
  EXPECT_LT(quantile(errors, 1), 0.6);
}

TEST(ScanAhead, FactorFollowsFromTheSmallestRadius) {
  FilmDescription film;
  film.width = 1500;
  film.height = 500;
  for (const auto& [pixel_um, factor] :
       {std::pair(1.3, 2), {0.65, 4}, {2.0, 1}, {5.0, 1}, {0.0, 1}}) {
    film.pixel_um = pixel_um;
    EXPECT_EQ(reduction_factor(film, 4), factor);
  }
  film.pixel_um = 0.01;
  EXPECT_LE(500 / reduction_factor(film, 4), 64);
  EXPECT_GE(500 / reduction_factor(film, 4), 32);
}

TEST(ScanAhead, UselessFramesAreLeftOutAndSaid) {
  for (const float value : {0.0F, 65535.0F, std::numeric_limits<float>::quiet_NaN()}) {
    testing::SceneSource source(scene_of(6));
    source.set_spoiled({0, 3}, value);
    Messages messages;
    const auto scan = scan_ahead(source, {}, messages).prescan;
    EXPECT_EQ(scan.frames, (std::vector<int>{1, 2, 4, 5}));
    EXPECT_FALSE(messages.summary().empty());
  }
}

TEST(ScanAhead, AFilmWithoutUsableFrameIsAProblem) {
  testing::SceneSource source(scene_of(3));
  source.set_spoiled({0, 1, 2}, 0);
  Messages messages;
  EXPECT_THROW(scan_ahead(source, {}, messages), Problem);
  testing::SceneSource excluded(scene_of(2));
  excluded.edit().overrides.exclude_frames = {0, 1};
  EXPECT_THROW(scan_ahead(excluded, {}, messages), Problem);
}

TEST(ScanAhead, OneFrameIsEnough) {
  const testing::SceneSource source(scene_of(1));
  Messages messages;
  const auto result = scan_ahead(source, {}, messages);
  ASSERT_EQ(result.prescan.frames.size(), 1U);
  EXPECT_EQ(result.prescan.shift_x_px[0], 0);
  EXPECT_GT(result.camera.gain_electrons_per_count, 0);
}

TEST(FrameChoice, SpreadAndKeptOut) {
  FilmDescription film;
  film.frames = 100;
  for (int k = 0; k < 100; ++k) film.times_min.push_back(k);
  film.overrides.exclude_frames = {10};
  film.overrides.first_healthy_min = 10;
  film.overrides.last_healthy_min = 90;
  const auto chosen = spread_frames(film, 9);
  ASSERT_EQ(chosen.size(), 9U);
  EXPECT_EQ(chosen.front(), 11);
  EXPECT_EQ(chosen.back(), 90);
  EXPECT_FALSE(kept_out(film, 5).empty());
  EXPECT_TRUE(kept_out(film, 50).empty());
  EXPECT_EQ(spread_frames(film, 1), std::vector<int>{11});
}

}  // namespace
}  // namespace wavefount::tube
