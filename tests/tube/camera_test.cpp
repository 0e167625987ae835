#include <gtest/gtest.h>

#include <cmath>

#include "tube_scene.h"
#include "wavefount/core/random.h"
#include "wavefount/tube/photon_transfer.h"

namespace wavefount::tube {
namespace {

struct Camera {
  const char* name;
  double gain, read_noise, offset;
  int bit_depth;
  double scale;  ///< the pixel values as stored over counts
};

class CameraNoise : public ::testing::TestWithParam<Camera> {};

/// Two frames with drift, bleaching, a moving bright blob and fixed pattern between them.
TEST_P(CameraNoise, GainWithinTenPerCent) {
  const auto& camera = GetParam();
  testing::TubeScene scene;
  scene.width = 500;
  scene.height = 260;
  scene.frames = 12;
  scene.gain = camera.gain;
  scene.read_noise = camera.read_noise;
  scene.offset = camera.offset;
  scene.bit_depth = camera.bit_depth == 32 ? 16 : camera.bit_depth;
  scene.bleaching = 0.01;
  scene.tubes = {{250, 130, 0.05, 0, 380, 110}};
  const double room = std::ldexp(1.0, scene.bit_depth) - camera.offset;
  scene.tubes[0].level = std::min(200.0, 0.35 * room);
  scene.outside = 0.1 * scene.tubes[0].level;
  for (int k = 0; k < 6; ++k)
    scene.blobs.push_back(
        {120.0 + 50 * k, 130, 9, std::min(300.0, 0.3 * room), 0, 100, k % 2 ? 1.0 : -0.6});
  for (int k = 0; k < scene.frames; ++k) scene.drift.push_back({0.7 * k, -0.4 * k});
  std::vector<NoisePoint> points;
  for (int k = 0; k + 1 < scene.frames; k += 3) {
    auto first = testing::draw_frame(scene, k);
    auto second = testing::draw_frame(scene, k + 1);
    for (const auto& image : {first, second})
      for (int i = 0; i < scene.width * scene.height; ++i)
        image->GetBufferPointer()[i] =
            static_cast<float>(image->GetBufferPointer()[i] * camera.scale);
    add_pair(*first, *second, 1e9, points);
  }
  CameraSettings given;
  given.dark_offset_counts = camera.offset * camera.scale;
  std::vector<std::string> notes;
  const auto found = estimate_camera(points, given, 1, 0, 65535, notes);
  const double gain = camera.gain / camera.scale;
  EXPECT_NEAR(found.gain_electrons_per_count, gain, 0.1 * gain);
  EXPECT_NEAR(found.read_noise_electrons, camera.read_noise, 0.25 * camera.read_noise + 0.5);
  EXPECT_TRUE(found.offset_given);
  EXPECT_FALSE(found.gain_given);
}

INSTANTIATE_TEST_SUITE_P(Cameras, CameraNoise,
                         ::testing::Values(Camera{"Scientific16", 0.5, 2, 100, 16, 1},
                                           Camera{"Fine12", 4, 6, 50, 12, 1},
                                           Camera{"Eight", 0.8, 1.5, 10, 8, 1},
                                           Camera{"Coarse", 0.15, 3, 300, 16, 1},
                                           Camera{"Float", 0.5, 2, 100, 32, 1.0 / 4096}),
                         [](const auto& one) { return std::string(one.param.name); });

TEST(CameraNoise, SidecarWins) {
  std::vector<NoisePoint> points;
  for (int k = 0; k < 100; ++k) points.push_back({100.0 + k, 10 + 2.0 * k});
  CameraSettings given{1.5, 3.0, 20.0};
  std::vector<std::string> notes;
  const auto found = estimate_camera(points, given, 4, 0, 65535, notes);
  EXPECT_EQ(found.gain_electrons_per_count, 1.5);
  EXPECT_EQ(found.read_noise_electrons, 6);  // of four planes together
  EXPECT_EQ(found.dark_offset_counts, 80);
  EXPECT_TRUE(found.gain_given);
}

TEST(CameraNoise, EvenFilmSaysSo) {
  std::vector<NoisePoint> points;
  RandomStream random(3);
  for (int k = 0; k < 500; ++k)
    points.push_back({200 + 0.1 * random.normal(), 50 + 8 * random.normal()});
  std::vector<std::string> notes;
  CameraSettings given;
  given.dark_offset_counts = 100;
  const auto found = estimate_camera(points, given, 1, 150, 65535, notes);
  EXPECT_NEAR(found.gain_electrons_per_count, 2, 0.2);
  ASSERT_EQ(notes.size(), 1U);
}

TEST(Saturation, PileUpBelowTheBitDepthIsFound) {
  auto image = make_image(100, 100);
  RandomStream random(8);
  for (int i = 0; i < 10000; ++i)
    image->GetBufferPointer()[i] =
        static_cast<float>(std::min(4095.0, std::round(3000 + 700 * random.normal())));
  SaturationFinder twelve_in_sixteen(16);
  twelve_in_sixteen.add(*image);
  EXPECT_EQ(twelve_in_sixteen.saturation(), 4095);
  for (int i = 0; i < 10000; ++i) image->GetBufferPointer()[i] = static_cast<float>(i % 20);
  SaturationFinder dim(16);
  dim.add(*image);
  EXPECT_EQ(dim.saturation(), 65535);
  image->FillBuffer(255);
  SaturationFinder constant(8);
  constant.add(*image);
  EXPECT_EQ(constant.saturation(), 255);
}

}  // namespace
}  // namespace wavefount::tube
