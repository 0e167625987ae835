#include "wavefount/tube/drift.h"

#include <gtest/gtest.h>

#include <cmath>

#include "wavefount/core/random.h"

namespace wavefount::tube {
namespace {

std::vector<FrameObservation> seen(const std::vector<double>& x, double noise) {
  RandomStream random(11);
  std::vector<FrameObservation> frames;
  for (const double one : x) {
    FrameObservation frame;
    frame.frame = static_cast<int>(frames.size());
    frame.shift_x_px = one + noise * random.normal();
    frame.shift_y_px = -one + noise * random.normal();
    frame.shift_quality = 0.9;
    frame.shift_se_px = noise;
    frames.push_back(frame);
  }
  return frames;
}

std::vector<double> ramp(int count, double slope) {
  std::vector<double> x;
  for (int k = 0; k < count; ++k) x.push_back(slope * k);
  return x;
}

TEST(Drift, NoiseIsSmoothed) {
  const auto truth = ramp(200, 0.02);
  const auto frames = seen(truth, 0.3);
  const auto drift = settle_drift(frames, {5});
  double before = 0;
  double after = 0;
  for (std::size_t k = 0; k < truth.size(); ++k) {
    before += std::pow(frames[k].shift_x_px - truth[k], 2);
    after += std::pow(drift.x_px[k] - truth[k], 2);
  }
  EXPECT_LT(after, before / 4);
  EXPECT_TRUE(drift.jumps.empty());
}

TEST(Drift, OutliersAndGapsAreFilledIn) {
  const auto truth = ramp(60, 0.1);
  auto frames = seen(truth, 0.05);
  frames[20].shift_x_px += 30;
  frames[41].shift_y_px -= 12;
  frames[50].usable = false;
  frames[50].shift_x_px = 0;
  frames[59].shift_quality = 0;
  frames[59].shift_x_px = 99;
  const auto drift = settle_drift(frames, {5});
  for (std::size_t k = 0; k < truth.size(); ++k) {
    EXPECT_NEAR(drift.x_px[k], truth[k], 0.4) << k;
    EXPECT_NEAR(drift.y_px[k], -truth[k], 0.4) << k;
  }
  EXPECT_TRUE(drift.jumps.empty());
}

TEST(Drift, JumpsStaySharp) {
  auto truth = ramp(60, 0.05);
  for (std::size_t k = 30; k < 60; ++k) truth[k] += 20;
  const auto drift = settle_drift(seen(truth, 0.1), {5});
  EXPECT_EQ(drift.jumps, std::vector<int>{30});
  EXPECT_NEAR(drift.x_px[29], truth[29], 0.4);
  EXPECT_NEAR(drift.x_px[30], truth[30], 0.4);
  EXPECT_NEAR(farthest_px(drift), std::hypot(truth[59], truth[59]), 1);
}

TEST(Drift, NothingKnownIsNoDrift) {
  auto frames = seen(ramp(4, 1), 0);
  for (auto& frame : frames) frame.usable = false;
  const auto drift = settle_drift(frames, {5});
  EXPECT_EQ(drift.x_px, std::vector<double>(4, 0.0));
  EXPECT_TRUE(settle_drift({}, {5}).x_px.empty());
  EXPECT_EQ(settle_drift(seen({0}, 0), {5}).x_px.size(), 1U);
}

}  // namespace
}  // namespace wavefount::tube
