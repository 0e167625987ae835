#include <gtest/gtest.h>
#include <unistd.h>

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <opencv2/core.hpp>

#include "small_scene.h"
#include "wavefount/core/robust.h"
#include "wavefount/nuclei/aperture.h"
#include "wavefount/nuclei/measure_places.h"

namespace wavefount::nuclei {
namespace {

constexpr int frames = 30;
/// Frames in which the first nucleus is bright and was found.
bool filled(int frame) {
  return (frame >= 5 && frame < 12) || (frame >= 18 && frame < 25);
}

/// A film of two nuclei on a drifting stage: one comes and goes, its neighbour stays.
class PlacesTest : public testing::Test {
 protected:
  PlacesTest()
      : file_(std::filesystem::temp_directory_path() /
              ("wavefount-places-" + std::to_string(::getpid()))),
        reduced_(file_, frames, 2, 0, 0, scene_.width / 2, scene_.height / 2, 0, 4000) {
    film_.width = scene_.width;
    film_.height = scene_.height;
    film_.frames = frames;
    film_.pixel_um = scene_.pixel_um;
    nuclei_.nuclei.resize(2);
    for (int frame = 0; frame < frames; ++frame) add_frame(frame);
  }

  void add_frame(int frame) {
    const double time = 0.5 * frame;
    const double drift = 0.37 * frame;
    film_.times_min.push_back(time);
    drift_.x_px.push_back(drift);
    drift_.y_px.push_back(-drift / 2);
    FrameObservation observation;
    observation.frame = frame;
    observation.usable = frame != 14;
    observations_.frames.push_back(observation);
    scene_.seed = static_cast<std::uint64_t>(frame) + 1;
    scene_.nuclei = {{300 + drift, 150 - drift / 2, 15, filled(frame) ? 200.0 : 0.0},
                     {345 + drift, 150 - drift / 2, 15, 120}};
    if (observation.usable) reduced_.write(frame, *scene_.reduced(*scene_.frame()));
    for (int i = 0; i < 2; ++i) {
      if (!observation.usable || (i == 0 && !filled(frame))) continue;
      const TrueNucleus& truth = scene_.nuclei[static_cast<std::size_t>(i)];
      TracePoint point;
      point.frame = frame;
      point.time_min = time;
      point.found = true;
      point.x_um = (truth.x - drift) * scene_.pixel_um;
      point.y_um = (truth.y + drift / 2) * scene_.pixel_um;
      point.radius_um = truth.radius * scene_.pixel_um;
      nuclei_.nuclei[static_cast<std::size_t>(i)].points.push_back(point);
    }
  }

  ApertureTraces run(double before, double after) {
    const CameraModel camera = scene_.camera();
    const Tubes tubes = scene_.tubes();
    return measure_places(
        {film_, reduced_, camera, tubes.tubes[0], drift_, observations_, before, after}, nuclei_);
  }

  SmallScene scene_;
  std::filesystem::path file_;
  ReducedFilm reduced_;
  FilmDescription film_;
  Drift drift_;
  Observations observations_;
  Nuclei nuclei_;
};

TEST_F(PlacesTest, FollowsThePlaceThroughFormationAndLoss) {
  const auto traces = run(100, 100);
  ASSERT_EQ(traces.traces.size(), 2U);
  const ApertureTrace& trace = traces.traces[0];
  ASSERT_EQ(trace.frame.size(), 29U);  // all but the unusable one
  std::vector<double> full;
  std::vector<double> pulls;
  for (std::size_t i = 0; i < trace.frame.size(); ++i) {
    EXPECT_NE(trace.frame[i], 14);
    if (filled(trace.frame[i]))
      full.push_back(trace.signal[i]);
    else
      pulls.push_back(trace.signal[i] / std::sqrt(trace.variance[i]));
  }
  // Blur carries some of the light over the aperture's rim.
  EXPECT_NEAR(median(full), 185, 12);
  EXPECT_LT(robust_sd(full), 3);
  EXPECT_NEAR(median(pulls), 0, 1.5);
  EXPECT_LT(robust_sd(pulls), 1.8);
}

TEST_F(PlacesTest, RangeInTime) {
  const auto traces = run(1, 1.5);
  EXPECT_EQ(traces.traces[0].frame.front(), 3);
  EXPECT_EQ(traces.traces[0].frame.back(), 27);
}

TEST_F(PlacesTest, CompletesThePointsInBetween) {
  run(10, 10);
  const auto& points = nuclei_.nuclei[0].points;
  ASSERT_EQ(points.size(), 19U);  // frames 5 to 24 but the unusable one
  for (std::size_t i = 0; i < points.size(); ++i) {
    EXPECT_EQ(points[i].found, filled(points[i].frame));
    if (i > 0) {
      EXPECT_GT(points[i].frame, points[i - 1].frame);
    }
    if (points[i].found) continue;
    EXPECT_NEAR(points[i].brightness, 0, 15);
    EXPECT_NEAR(points[i].cytoplasm, 300, 15);
    EXPECT_NEAR(points[i].x_px, 300 + 0.37 * points[i].frame, 0.1);
  }
}

TEST_F(PlacesTest, NoNucleiNoTraces) {
  nuclei_.nuclei.clear();
  EXPECT_TRUE(run(10, 10).traces.empty());
}

TEST(Aperture, RimPixelsCountByTheShareCovered) {
  const cv::Mat1b tube(60, 60, static_cast<unsigned char>(1));
  CameraModel camera;
  for (const double offset : {0.0, 0.3, 0.5}) {
    cv::Mat1f frame(60, 60, 10.0F);
    for (int y = 0; y < 60; ++y)
      for (int x = 0; x < 60; ++x)
        frame(y, x) += static_cast<float>(
            50 * std::clamp(6.5 - std::hypot(x - 30 - offset, y - 30.0), 0.0, 1.0));
    const auto reading = read_aperture(frame, tube, {30 + offset, 30, 6}, {}, camera, 4);
    ASSERT_TRUE(reading.valid);
    EXPECT_NEAR(reading.signal, 47, 1.0);
    EXPECT_NEAR(reading.surroundings, 10, 0.1);
    EXPECT_GT(reading.variance, 0);
  }
}

TEST(Aperture, OutsideOfTheTubeIsNoReading) {
  cv::Mat1b tube(60, 60, static_cast<unsigned char>(0));
  const cv::Mat1f frame(60, 60, 10.0F);
  EXPECT_FALSE(read_aperture(frame, tube, {30, 30, 6}, {}, {}, 4).valid);
  tube.setTo(1);
  EXPECT_FALSE(read_aperture(frame, tube, {-30, 30, 6}, {}, {}, 4).valid);
}

}  // namespace
}  // namespace wavefount::nuclei
