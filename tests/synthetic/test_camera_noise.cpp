#include <gtest/gtest.h>

#include <cmath>

#include "wavefount/synthetic/camera_noise.h"

namespace wavefount {
namespace {

struct Moments {
  double mean = 0, variance = 0;
};

Moments exposed(double light, const SceneCamera& camera) {
  auto image = make_image(400, 400);
  as_matrix(*image).setTo(light);
  expose(*image, camera, 5, 2);
  const float* pixels = image->GetBufferPointer();
  constexpr int count = 400 * 400;
  Moments m;
  for (int i = 0; i < count; ++i) m.mean += pixels[i] / count;
  for (int i = 0; i < count; ++i) m.variance += (pixels[i] - m.mean) * (pixels[i] - m.mean) / count;
  return m;
}

class NoiseAtLight : public testing::TestWithParam<double> {};

TEST_P(NoiseAtLight, HasTheMeanAndVarianceOfAPhotonCount) {
  SceneCamera camera;
  camera.gain_electrons_per_count = 0.8;
  camera.read_noise_electrons = 3;
  camera.dark_offset_counts = 200;  // far enough from zero that nothing is clipped
  const double light = GetParam();
  const auto m = exposed(light, camera);
  const double gain = camera.gain_electrons_per_count;
  // A twelfth for rounding to whole counts.
  const double variance = (light * gain + 9) / (gain * gain) + 1.0 / 12;
  EXPECT_NEAR(m.mean, light + 200, 4 * std::sqrt(variance) / 400);
  EXPECT_NEAR(m.variance / variance, 1, 0.02);
}

INSTANTIATE_TEST_SUITE_P(Lights, NoiseAtLight,
                         testing::Values(0.0, 3.0, 20.0, 30.0, 300.0, 5000.0));

TEST(CameraNoise, CountsAreWholeAndWithinTheBitDepth) {
  SceneCamera camera;
  camera.bit_depth = 12;
  auto image = make_image(64, 64);
  as_matrix(*image).setTo(4000);
  expose(*image, camera, 1, 0);
  for (int i = 0; i < 64 * 64; ++i) {
    const float value = image->GetBufferPointer()[i];
    EXPECT_EQ(value, std::floor(value));
    EXPECT_LE(value, 4095);
  }
}

TEST(CameraNoise, FramesDiffer) {
  SceneCamera camera;
  auto one = make_image(32, 32);
  auto two = make_image(32, 32);
  as_matrix(*one).setTo(100);
  as_matrix(*two).setTo(100);
  expose(*one, camera, 1, 0);
  expose(*two, camera, 1, 1);
  int same = 0;
  for (int i = 0; i < 1024; ++i)
    same += one->GetBufferPointer()[i] == two->GetBufferPointer()[i] ? 1 : 0;
  EXPECT_LT(same, 100);
}

}  // namespace
}  // namespace wavefount
