#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <vector>

#include "wavefount/core/random.h"
#include "wavefount/core/robust.h"
#include "wavefount/nuclei/blob_scales.h"
#include "wavefount/nuclei/scale_space.h"

namespace wavefount::nuclei {
namespace {

TEST(BlobScales, CoverTheRangeHalfAnOctaveApart) {
  const auto scales = plan_blob_scales(3, 20);
  EXPECT_NEAR(scales.front().radius_px, 3, 0.1);
  EXPECT_GE(scales.back().radius_px, 19.5);
  for (std::size_t i = 1; i < scales.size(); ++i)
    EXPECT_NEAR(scales[i].radius_px / scales[i - 1].radius_px, std::sqrt(2.0), 0.03);
  EXPECT_GT(scales.back().step, 1);
}

TEST(BlobScales, NoiseGainIsTheSpreadOfTheResponseToWhiteNoise) {
  const auto scales = plan_blob_scales(2.5, 16);
  RandomStream random(7);
  cv::Mat1f noise(600, 700);
  for (float& pixel : noise) pixel = static_cast<float>(random.normal());
  const ScaleSpace space(noise, scales);
  for (int scale = 0; scale < static_cast<int>(scales.size()); ++scale) {
    const cv::Mat1f& level = space.smoothed(scale);
    std::vector<double> values;
    const int margin = level.rows / 6;
    for (int y = margin; y < level.rows - margin; ++y)
      for (int x = margin; x < level.cols - margin; ++x)
        values.push_back(space.response(scale, x, y));
    const double gain = scales[static_cast<std::size_t>(scale)].noise_gain;
    EXPECT_NEAR(robust_sd(values) / gain, 1, scale < 4 ? 0.05 : 0.2) << "scale " << scale;
  }
}

TEST(BlobScales, ADiscAnswersMostAtItsOwnScaleAndTwoOverE) {
  const auto scales = plan_blob_scales(3, 24);
  for (const double radius : {4.24, 8.5, 17.0}) {
    cv::Mat1f image(160, 160, 0.0F);
    for (int y = 0; y < 160; ++y)
      for (int x = 0; x < 160; ++x)
        image(y, x) =
            static_cast<float>(std::clamp(radius + 0.5 - std::hypot(x - 80, y - 80), 0.0, 1.0));
    const ScaleSpace space(image, scales);
    double best = 0;
    double best_radius = 0;
    for (int scale = 0; scale < static_cast<int>(scales.size()); ++scale) {
      const auto& used = scales[static_cast<std::size_t>(scale)];
      const double response = space.response(scale, 80 / used.step, 80 / used.step);
      if (response > best) best_radius = used.radius_px;
      best = std::max(best, response);
    }
    EXPECT_NEAR(best_radius / radius, 1, 0.2);
    EXPECT_NEAR(best, 2 / std::exp(1.0), 0.04);
  }
}

TEST(ScaleSpace, RoundnessTellsADiscFromALineAndAnEdge) {
  const auto scales = plan_blob_scales(4, 4);
  cv::Mat1f disc(60, 60, 0.0F);
  cv::Mat1f line(60, 60, 0.0F);
  for (int y = 0; y < 60; ++y)
    for (int x = 0; x < 60; ++x) {
      disc(y, x) = std::hypot(x - 30, y - 30) < 4 ? 1.0F : 0.0F;
      line(y, x) = std::abs(y - 30) < 3 ? 1.0F : 0.0F;
    }
  EXPECT_GT(ScaleSpace(disc, scales).roundness(0, 30, 30), 0.95);
  EXPECT_LT(ScaleSpace(line, scales).roundness(0, 30, 30), 0.02);
}

}  // namespace
}  // namespace wavefount::nuclei
