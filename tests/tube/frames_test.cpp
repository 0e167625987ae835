#include <gtest/gtest.h>
#include <unistd.h>

#include <cmath>
#include <filesystem>
#include <limits>

#include "tube_scene.h"
#include "wavefount/core/robust.h"
#include "wavefount/tube/binning.h"
#include "wavefount/tube/drift.h"
#include "wavefount/tube/find_tubes.h"
#include "wavefount/tube/frame_plan.h"
#include "wavefount/tube/scan_ahead.h"

namespace wavefount::tube {
namespace {

class Folder {
 public:
  Folder()
      : path_(std::filesystem::temp_directory_path() / ("tube-" + std::to_string(::getpid()))) {
    std::filesystem::create_directories(path_);
  }
  ~Folder() { std::filesystem::remove_all(path_); }
  Folder(const Folder&) = delete;
  Folder& operator=(const Folder&) = delete;
  const std::filesystem::path& path() const { return path_; }

 private:
  std::filesystem::path path_;
};

/// Everything up to the frame steps.
struct Prepared {
  explicit Prepared(const testing::SceneSource& film) : source(film) {
    Messages messages;
    auto scan = scan_ahead(source, {16, 4, 4, 25}, messages);
    prescan = scan.prescan;
    tubes = find_tubes(source.description(), prescan, {}, messages);
    const auto crop = plan_crop(source.description(), prescan, tubes, 25);
    reduced = make_reduced_film(source.description(), prescan, crop, folder.path());
    plan = plan_frames(source.description(), prescan, scan.camera, tubes, *reduced, 25);
  }

  FrameObservation observe(int frame, ImagePointer pixels = nullptr) const {
    FrameObservation observation;
    observation.frame = frame;
    if (pixels.IsNull()) pixels = source.frame(frame);
    const auto small = reduce_frame(*pixels, *reduced, plan, observation);
    register_frame(*small, plan, reduced->factor(), observation);
    return observation;
  }

  Folder folder;
  const testing::SceneSource& source;
  Prescan prescan;
  Tubes tubes;
  std::shared_ptr<ReducedFilm> reduced;
  FramePlan plan;
};

testing::TubeScene moving_scene() {
  testing::TubeScene scene;
  scene.width = 520;
  scene.height = 240;
  scene.frames = 40;
  scene.tubes = {{260, 120, 0.03, 0, 380, 100}};
  for (int k = 0; k < 12; ++k) {
    scene.blobs.push_back({90.0 + 28 * k, 100.0 + 17 * (k % 3), 9, 400, 0, 14 + k % 5});
    scene.blobs.push_back({106.0 + 28 * k, 96.0 + 17 * (k % 4), 9, 400, 24 + k % 5, 1000});
  }
  for (int k = 0; k < scene.frames; ++k)
    scene.drift.push_back({0.3 * k + 0.5 * std::sin(k) + (k >= 27 ? 13.0 : 0.0),
                           0.2 * k - 0.4 * std::cos(2.0 * k) + (k >= 27 ? -7.0 : 0.0)});
  return scene;
}

TEST(Frames, DriftThroughAWaveAndAJump) {
  const testing::SceneSource source(moving_scene());
  const Prepared prepared(source);
  std::vector<FrameObservation> frames;
  for (int k = 0; k < source.scene().frames; ++k) frames.push_back(prepared.observe(k));
  const auto drift = settle_drift(frames, {5});
  const auto& truth = source.scene().drift;
  std::vector<double> errors;
  for (std::size_t k = 0; k < frames.size(); ++k)
    errors.push_back(std::hypot(drift.x_px[k] - truth[k].x + truth[0].x,
                                drift.y_px[k] - truth[k].y + truth[0].y));
  EXPECT_LT(median(errors), 0.3);
  EXPECT_LT(quantile(errors, 1), 1);
  EXPECT_EQ(drift.jumps, std::vector<int>{27});
  for (const auto& frame : frames) {
    EXPECT_TRUE(frame.usable);
    EXPECT_GT(frame.shift_quality, 0.5);
    EXPECT_GT(frame.sharpness, 0);
  }
}

TEST(Frames, SameFrameSameNumbers) {
  const testing::SceneSource source(moving_scene());
  const Prepared prepared(source);
  const auto once = prepared.observe(17);
  const auto again = prepared.observe(17);
  EXPECT_EQ(once.shift_x_px, again.shift_x_px);
  EXPECT_EQ(once.shift_y_px, again.shift_y_px);
  EXPECT_EQ(once.total_light, again.total_light);
}

TEST(Frames, LightAndUselessFrames) {
  auto scene = moving_scene();
  scene.blobs.clear();
  const testing::SceneSource source(scene);
  const Prepared prepared(source);
  const auto good = prepared.observe(5);
  EXPECT_NEAR(good.tube_pixels, 380 * 100, 0.03 * 380 * 100);
  EXPECT_NEAR(good.total_light / good.tube_pixels, 330, 6);
  EXPECT_EQ(good.saturated_share, 0);

  auto image = make_image(scene.width, scene.height);
  image->FillBuffer(0);
  EXPECT_FALSE(prepared.observe(5, image).usable);
  image->FillBuffer(std::numeric_limits<float>::quiet_NaN());
  const auto broken = prepared.observe(5, image);
  EXPECT_FALSE(broken.usable);
  EXPECT_FALSE(broken.problem.empty());
  EXPECT_TRUE(std::isfinite(broken.total_light));

  auto dark = scene;
  dark.tubes[0].level = 1;
  dark.outside = 1;
  EXPECT_FALSE(prepared.observe(5, testing::draw_frame(dark, 5)).usable);

  auto full = source.frame(5);
  for (int i = 0; i < scene.width * scene.height; ++i)
    if (full->GetBufferPointer()[i] > 250) full->GetBufferPointer()[i] = 65535;
  const auto saturated = prepared.observe(5, full);
  EXPECT_GT(saturated.saturated_share, 0.9);
  EXPECT_FALSE(saturated.usable);
}

TEST(Frames, AFewBrokenPixelsAreMended) {
  const testing::SceneSource source(moving_scene());
  const Prepared prepared(source);
  auto image = source.frame(3);
  image->GetBufferPointer()[120 * 520 + 260] = std::numeric_limits<float>::infinity();
  const auto seen = prepared.observe(3, image);
  EXPECT_TRUE(seen.usable);
  EXPECT_TRUE(std::isfinite(image->GetBufferPointer()[120 * 520 + 260]));
  EXPECT_NEAR(seen.shift_x_px, prepared.observe(3).shift_x_px, 0.05);
}

TEST(Frames, ReducedFilmKeepsCounts) {
  const testing::SceneSource source(moving_scene());
  const Prepared prepared(source);
  FrameObservation observation;
  auto pixels = source.frame(2);
  const auto reduced = reduce_frame(*pixels, *prepared.reduced, prepared.plan, observation);
  prepared.reduced->write(2, *reduced);
  const auto back = prepared.reduced->read(2);
  double worst = 0;
  for (int i = 0; i < prepared.reduced->width() * prepared.reduced->height(); ++i)
    worst = std::max(worst, static_cast<double>(std::abs(reduced->GetBufferPointer()[i] -
                                                         back->GetBufferPointer()[i])));
  EXPECT_LT(worst, 0.1);
}

TEST(Frames, AVeryShortFilmWithoutTube) {
  auto scene = moving_scene();
  scene.frames = 1;
  scene.tubes.clear();
  scene.drift.clear();
  const testing::SceneSource source(scene);
  const Prepared prepared(source);
  EXPECT_FALSE(prepared.tubes.tubes[0].measured);
  const auto seen = prepared.observe(0);
  EXPECT_TRUE(seen.usable);
  EXPECT_NEAR(seen.shift_x_px, 0, 0.1);
  EXPECT_NEAR(seen.shift_y_px, 0, 0.1);
}

TEST(Binning, MeansAtAnyFactor) {
  auto image = make_image(70, 45);
  for (int i = 0; i < 70 * 45; ++i)
    image->GetBufferPointer()[i] = static_cast<float>(i % 70 + i / 70);
  for (const int factor : {1, 2, 3, 4, 5, 6, 7, 11}) {
    const auto reduced = bin_mean(*image, factor);
    ASSERT_EQ(image_width(*reduced), 70 / factor);
    for (int y = 0; y < image_height(*reduced); ++y)
      for (int x = 0; x < image_width(*reduced); ++x)
        EXPECT_NEAR(reduced->GetBufferPointer()[y * image_width(*reduced) + x],
                    to_full_px(x, factor) + to_full_px(y, factor), 1e-3);
  }
}

}  // namespace
}  // namespace wavefount::tube
