#include "wavefount/tables/film_quality.h"

#include <gtest/gtest.h>

#include <cmath>

namespace wavefount {
namespace {

Observations decaying(double rate_per_min, int frames) {
  Observations observations;
  for (int frame = 0; frame < frames; ++frame) {
    FrameObservation one;
    one.frame = frame;
    one.time_min = 0.5 * frame;
    one.tube_pixels = 5000;
    one.total_light = 5000 * (100 + 300 * std::exp(-rate_per_min * one.time_min));
    observations.frames.push_back(one);
  }
  return observations;
}

Tube closed_tube() {
  Tube tube;
  tube.measured = true;
  return tube;
}

TEST(Bleaching, IsTheLightLostAboveTheDarkOffset) {
  CameraModel camera;
  camera.dark_offset_counts = 100;
  auto observations = decaying(0.002, 401);
  observations.frames[100].usable = false;
  observations.frames[100].total_light = 0;
  for (int frame = 200; frame < 230; ++frame)
    observations.frames[static_cast<std::size_t>(frame)].total_light *= 1.5;  // a lamp that flares
  const auto percent = bleaching_percent(observations, closed_tube(), &camera);
  ASSERT_TRUE(percent);
  EXPECT_NEAR(*percent, 100 * (1 - std::exp(-0.002 * 200)), 0.7);
}

TEST(Bleaching, IsNotToldWhereLightEntersTheView) {
  const CameraModel camera;
  auto tube = closed_tube();
  tube.right_end = Boundary::open;
  EXPECT_FALSE(bleaching_percent(decaying(0.002, 50), tube, &camera));
  EXPECT_FALSE(bleaching_percent(decaying(0.002, 50), closed_tube(), nullptr));
  EXPECT_FALSE(bleaching_percent(decaying(0.002, 2), closed_tube(), &camera));
  EXPECT_FALSE(bleaching_percent({}, closed_tube(), &camera));
}

TEST(LastHealthy, EndsWithTheFirstTerminalWave) {
  FilmDescription film;
  EXPECT_FALSE(last_healthy_min(film, {}));
  film.times_min = {0, 50, 100};
  Waves waves;
  waves.waves.resize(2);
  waves.waves[0].start_min = 20;
  waves.waves[1].start_min = 70;
  EXPECT_EQ(last_healthy_min(film, waves), 100);
  waves.waves[1].fate = Fate::terminal;
  EXPECT_EQ(last_healthy_min(film, waves), 70);
  film.overrides.last_healthy_min = 60;
  EXPECT_EQ(last_healthy_min(film, waves), 60);
}

TEST(SignalToNoise, ComparesNucleiWithThePixelNoiseOfTheirCytoplasm) {
  CameraModel camera;
  Nuclei nuclei;
  EXPECT_FALSE(signal_to_noise(nuclei, &camera));
  nuclei.nuclei.resize(1);
  TracePoint point;
  point.found = true;
  point.brightness = 90;
  point.cytoplasm = 400;
  nuclei.nuclei[0].points = {point};
  point.doubtful = true;
  point.brightness = 5000;
  nuclei.nuclei[0].points.push_back(point);
  EXPECT_NEAR(signal_to_noise(nuclei, &camera).value(), 90 / std::sqrt(camera.variance(400)), 1e-9);
}

}  // namespace
}  // namespace wavefount
