#include "wavefount/pictures/pictures.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <set>

#include "fake_records.h"
#include "scratch_folder.h"
#include "wavefount/core/interphase.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"
#include "wavefount/pictures/kymograph.h"

namespace wavefount {
namespace {

using Draw = Canvas (*)(const RecordStore&, const std::string&);
constexpr Draw drawings[] = {draw_kymograph, draw_map, draw_montage, draw_curves};

/// Number of different colours in a PNG as cairo decodes it; 0 when it cannot.
std::size_t colours_in(const std::filesystem::path& file, int& width, int& height) {
  auto* surface = cairo_image_surface_create_from_png(file.c_str());
  std::set<std::uint32_t> colours;
  if (cairo_surface_status(surface) == CAIRO_STATUS_SUCCESS) {
    width = cairo_image_surface_get_width(surface);
    height = cairo_image_surface_get_height(surface);
    const auto* bytes = cairo_image_surface_get_data(surface);
    for (int y = 0; y < height; ++y) {
      const auto* row = reinterpret_cast<const std::uint32_t*>(
          bytes + static_cast<std::ptrdiff_t>(y) * cairo_image_surface_get_stride(surface));
      colours.insert(row, row + width);
    }
  }
  cairo_surface_destroy(surface);
  return colours.size();
}

class Pictures : public testing::Test {
 protected:
  void expect_good(const RecordStore& records, const std::string& name = "film") {
    int number = 0;
    for (const auto draw : drawings) {
      const auto file = folder_.path() / ("picture-" + std::to_string(number++) + ".png");
      draw(records, name).write_png(file);
      int width = 0, height = 0;
      EXPECT_GT(colours_in(file, width, height), 20U) << file << ' ' << name;
      EXPECT_EQ(width, 1600);
      EXPECT_GT(height, 200);
      EXPECT_LE(height, 1600);
    }
  }

  std::filesystem::path work_file() const { return folder_.path() / "reduced"; }

  fake::ScratchFolder folder_;
};

TEST_F(Pictures, ShowAnAcquisition) {
  expect_good(fake::records_of({}, work_file()));
}

TEST_F(Pictures, ShowAnUprightTube) {
  fake::Scene scene;
  scene.upright = true;
  expect_good(fake::records_of(scene, work_file()));
}

TEST_F(Pictures, ShowASingleFrameWithoutTubeOrTimes) {
  fake::Scene scene;
  scene.frames = 1;
  scene.tube = false;
  expect_good(fake::nuclei_only_records_of(scene, work_file()));
}

TEST_F(Pictures, ShowATubeWithoutNuclei) {
  fake::Scene scene;
  scene.spacing_um = 1e6;
  expect_good(fake::records_of(scene, work_file()));
}

TEST_F(Pictures, ShowMoreWavesThanPanels) {
  fake::Scene scene;
  scene.interval_min = 7;
  scene.waves = 15;
  expect_good(fake::records_of(scene, work_file()));
}

TEST_F(Pictures, ShowAVeryLongAndAVerySmallTube) {
  fake::Scene scene;
  scene.length_um = 20'000;
  scene.width_um = 100;
  scene.frames = 10;
  expect_good(fake::records_of(scene, work_file()));
  scene.length_um = 6;
  scene.width_um = 4;
  expect_good(fake::records_of(scene, work_file()));
}

TEST_F(Pictures, ShowWhatThereIsWithoutTheReducedFilm) {
  expect_good(fake::records_of({}));
}

TEST_F(Pictures, ShowUnusableFramesAndNoTubeAtAll) {
  auto records = fake::records_of({}, work_file());
  for (auto& frame : records.edit<Observations>().frames) frame.usable = false;
  records.drop<Tube>();
  records.drop<Waves>();
  expect_good(records);
}

TEST_F(Pictures, BearAnyName) {
  const auto records = fake::records_of({}, work_file());
  for (const std::string name : {"été, \"quoted\"\n\t=1+1", "\xff\xfe broken \xc3", "日本語", ""})
    expect_good(records, name);
  expect_good(records, std::string(3000, 'w'));
}

TEST_F(Pictures, AreTheSameBytesEachTime) {
  const auto records = fake::records_of({}, work_file());
  for (const auto draw : drawings) {
    draw(records, "film").write_png(folder_.path() / "first.png");
    draw(records, "film").write_png(folder_.path() / "second.png");
    EXPECT_EQ(fake::bytes_of(folder_.path() / "first.png"),
              fake::bytes_of(folder_.path() / "second.png"));
  }
}

TEST_F(Pictures, SayThatTheyCannotBeWritten) {
  EXPECT_THROW(draw_curves(fake::records_of({}), "film").write_png("/no/such/folder/a.png"),
               Problem);
}

TEST_F(Pictures, KymographFollowsTheWaveAndTheDrift) {
  fake::Scene scene;
  scene.drift_px = 30;
  const auto records = fake::records_of(scene, work_file());
  auto kymograph = kymograph_of(records, 480);
  ASSERT_EQ(kymograph.frames.size(), 60U);
  remove_standing_light(kymograph);
  // A nucleus in the middle of the tube, just before it enters and three minutes after.
  const auto& entry = records.get<WaveEntries>().entries[10];
  const int column = static_cast<int>(entry.along_um / scene.length_um * kymograph.columns);
  const auto row = static_cast<std::size_t>(entry.time_min);
  EXPECT_GT(kymograph.at(row, column), 30);
  EXPECT_LT(kymograph.at(row + 3, column), 15);
}

/// Weighted middle of the light around a column.
double middle_of_light(const Kymograph& kymograph, std::size_t row, int from, int to) {
  double sum = 0, moment = 0;
  for (int column = from; column < to; ++column) {
    const double light = std::max(0.0F, kymograph.at(row, column) - 420);
    sum += light;
    moment += light * column;
  }
  return moment / sum;
}

TEST_F(Pictures, KymographFollowsDriftFinerThanAReducedPixel) {
  fake::Scene scene;
  scene.drift_px = 3.3;
  scene.reduction = 4;
  scene.waves = 0;  // nuclei that stay
  scene.spacing_um = 300;
  const auto kymograph = kymograph_of(fake::records_of(scene, work_file()), 60);
  const double um_a_column = scene.length_um / kymograph.columns;
  const int from = static_cast<int>(350 / um_a_column);
  const int to = static_cast<int>(550 / um_a_column);
  const double first = middle_of_light(kymograph, 0, from, to);
  for (std::size_t row = 0; row < kymograph.frames.size(); ++row)
    EXPECT_NEAR(middle_of_light(kymograph, row, from, to) * um_a_column, first * um_a_column, 0.6);
}

TEST_F(Pictures, KymographReadsNoMoreFramesThanItShows) {
  fake::Scene scene;
  scene.frames = 300;
  const auto kymograph = kymograph_of(fake::records_of(scene, work_file()), 50);
  EXPECT_EQ(kymograph.frames.size(), 50U);
  EXPECT_EQ(kymograph.frames.front(), 0);
  EXPECT_EQ(kymograph.frames.back(), 299);
}

}  // namespace
}  // namespace wavefount
