#include <gtest/gtest.h>
#include <signal.h>
#include <sys/mount.h>
#include <unistd.h>

#include <fstream>
#include <limits>

#include "program.h"
#include "small_films.h"
#include "wavefount/acquisition/csv_reader.h"
#include "wavefount/acquisition/tiff_writer.h"

namespace wavefount {
namespace {

namespace fs = std::filesystem;

/// A folder `films` with one good film, and room for results beside it.
class BadInput : public testing::Test {
 protected:
  void SetUp() override {
    folder_ = test_folder();
    films_ = folder_ / "films";
    results_ = folder_ / "results";
    fs::create_directories(films_);
  }

  void add_good_film() const { write_small_film(films_, "good"); }

  Outcome run(const fs::path& films, const fs::path& out) const {
    return run_program({"run", shipped_pipeline("extract-tube"), films, "--out", out});
  }
  Outcome run() const { return run(films_, results_); }

  /// The good film was measured although `bad` was not, and `sentence` says why.
  void expect_only_bad_fails(const std::string& bad, const std::string& sentence) const {
    const auto outcome = run();
    EXPECT_EQ(outcome.status, 1) << outcome.output;
    EXPECT_NE(outcome.output.find("failed  " + bad), std::string::npos) << outcome.output;
    EXPECT_NE(outcome.output.find(sentence), std::string::npos) << outcome.output;
    EXPECT_TRUE(fs::exists(results_ / "good" / "record.json")) << outcome.output;
    EXPECT_FALSE(fs::exists(results_ / bad / "record.json"));
    EXPECT_TRUE(fs::exists(results_ / "workbook.xlsx"));
    EXPECT_NE(text_of(results_ / "acquisitions.csv").find(bad + ",failed"), std::string::npos)
        << text_of(results_ / "acquisitions.csv");
  }

  void expect_cannot_start(const Outcome& outcome, const std::string& sentence) const {
    EXPECT_EQ(outcome.status, 2) << outcome.output;
    EXPECT_NE(outcome.output.find(sentence), std::string::npos) << outcome.output;
  }

  fs::path folder_, films_, results_;
};

TEST_F(BadInput, NoSuchFolder) {
  expect_cannot_start(run(folder_ / "none", results_), "none");
}

TEST_F(BadInput, EmptyFolder) {
  expect_cannot_start(run(), "holds no");
}

TEST_F(BadInput, NotATiff) {
  add_good_film();
  std::ofstream(films_ / "notes.tif") << "These are my notes of Tuesday.";
  write_sidecar(films_, "notes");
  expect_only_bad_fails("notes", "TIFF");
}

TEST_F(BadInput, ZeroBytes) {
  add_good_film();
  std::ofstream(films_ / "empty.tif").flush();
  write_sidecar(films_, "empty");
  expect_only_bad_fails("empty", "empty");
}

TEST_F(BadInput, TruncatedFileIsUsedUpToTheBreak) {
  add_good_film();
  fs::copy_file(films_ / "good.tif", films_ / "cut.tif");
  fs::copy_file(films_ / "good.yaml", films_ / "cut.yaml");
  fs::resize_file(films_ / "cut.tif", fs::file_size(films_ / "good.tif") * 2 / 3);
  const auto outcome = run();
  EXPECT_EQ(outcome.status, 0) << outcome.output;
  const auto rows = text_of(results_ / "cut" / "acquisitions.csv");
  EXPECT_NE(rows.find("cut,done,"), std::string::npos) << rows;
  EXPECT_NE(rows.find("it is cut short"), std::string::npos) << rows;
}

TEST_F(BadInput, MissingPixelSizeSaysWhichLineToWrite) {
  add_good_film();
  fs::copy_file(films_ / "good.tif", films_ / "bare.tif");
  write_sidecar(films_, "bare", "frame_interval_min: 1\n");
  expect_only_bad_fails("bare", "pixel_size_um:");
}

TEST_F(BadInput, StampsGoBackwards) {
  add_good_film();
  fs::copy_file(films_ / "good.tif", films_ / "back.tif");
  std::string times = "times_min: [0";
  for (int frame = 1; frame < 24; ++frame) times += ", " + std::to_string(frame == 7 ? 3 : frame);
  write_sidecar(films_, "back", "pixel_size_um: 1.3\n" + times + "]\n");
  expect_only_bad_fails("back", "frame");
}

TEST_F(BadInput, FramesOfDifferentSize) {
  add_good_film();
  TiffWriter writer(films_ / "odd.tif", {});
  const std::vector<std::uint16_t> pixels(200 * 100, 500);
  writer.write(pixels.data(), 200, 100);
  writer.write(pixels.data(), 100, 100);
  writer.write(pixels.data(), 200, 100);
  writer.commit();
  write_sidecar(films_, "odd");
  expect_only_bad_fails("odd", "not 200 × 100");
}

TEST_F(BadInput, BlackFramesOnly) {
  add_good_film();
  write_flat_film(films_, "black", 12, 0);
  expect_only_bad_fails("black", "black");
}

TEST_F(BadInput, SaturatedFramesOnly) {
  add_good_film();
  write_flat_film(films_, "white", 12, 65535);
  expect_only_bad_fails("white", "white");
}

TEST_F(BadInput, FramesThatAreNoNumbers) {
  add_good_film();
  TiffLayout layout;
  layout.format = PixelFormat::float32;
  TiffWriter writer(films_ / "nan.tif", layout);
  const std::vector<float> pixels(160 * 100, std::numeric_limits<float>::quiet_NaN());
  for (int frame = 0; frame < 6; ++frame) writer.write(pixels.data(), 160, 100);
  writer.commit();
  write_sidecar(films_, "nan");
  expect_only_bad_fails("nan", "nan");
}

TEST_F(BadInput, OneFrameOnlyIsMeasuredWithoutTimes) {
  write_small_film(films_, "still", 1);
  const auto outcome = run();
  EXPECT_EQ(outcome.status, 0) << outcome.output;
  EXPECT_TRUE(fs::exists(results_ / "still" / "traces.csv"));
}

TEST_F(BadInput, SheetRowWithoutFilmAndFilmWithoutRow) {
  add_good_film();
  write_small_film(films_, "unlisted");
  std::ofstream(films_ / "acquisitions.csv") << "acquisition,condition\ngood,control\nghost,x\n";
  const auto outcome = run();
  EXPECT_EQ(outcome.status, 0) << outcome.output;
  EXPECT_NE(outcome.output.find("ghost"), std::string::npos) << outcome.output;
  EXPECT_NE(outcome.output.find("unlisted"), std::string::npos) << outcome.output;
  EXPECT_NE(text_of(results_ / "acquisitions.csv").find("sheet_condition"), std::string::npos);
}

TEST_F(BadInput, OutputInsideTheInput) {
  add_good_film();
  expect_cannot_start(run(films_, films_ / "results"), "lies inside");
  expect_cannot_start(run(films_, films_), "lies inside");
}

TEST_F(BadInput, OutputThatIsAFile) {
  add_good_film();
  std::ofstream(folder_ / "occupied") << "x";
  expect_cannot_start(run(films_, folder_ / "occupied"), "cannot be made");
}

TEST_F(BadInput, OutputThatCannotBeWritten) {
  add_good_film();
  // /proc refuses new files to everyone, root included.
  expect_cannot_start(run(films_, "/proc/self/fdinfo"), "cannot be");
}

TEST_F(BadInput, FullDisk) {
  add_good_film();
  fs::create_directories(results_);
  if (geteuid() != 0 || mount("none", results_.c_str(), "tmpfs", 0, "size=192k") != 0)
    GTEST_SKIP() << "a small disk cannot be mounted here";
  const auto outcome = run();
  EXPECT_NE(outcome.status, 0) << outcome.output;
  EXPECT_NE(outcome.output.find("free space"), std::string::npos) << outcome.output;
  EXPECT_FALSE(fs::exists(results_ / "good" / "record.json"));
  umount(results_.c_str());
}

TEST_F(BadInput, BrokenPipeline) {
  add_good_film();
  const auto pipeline = folder_ / "broken.yaml";
  std::ofstream(pipeline) << "steps:\n  - scan-ahead\n  - find-tube: {tube: no\n";
  expect_cannot_start(run_program({"run", pipeline, films_, "--out", results_}),
                      "this is not valid YAML");
  std::ofstream(pipeline) << "steps:\n  - find-nuclei\n";
  expect_cannot_start(run_program({"run", pipeline, films_, "--out", results_}),
                      "put '- scan-ahead' before it");
}

TEST_F(BadInput, NamesThatAreHardOnTables) {
  const std::vector<std::string> names = {"=SUM(A1)", "naïve \"quoted\", spaced", "-dash", "a,b"};
  for (const auto& name : names) write_small_film(films_, name);
  const auto outcome = run();
  EXPECT_EQ(outcome.status, 0) << outcome.output;
  const auto text = text_of(results_ / "acquisitions.csv");
  EXPECT_NE(text.find("'=SUM(A1)"), std::string::npos) << text;
  EXPECT_NE(text.find("\"naïve \"\"quoted\"\", spaced\""), std::string::npos) << text;
  for (const auto& name : names) EXPECT_TRUE(fs::exists(results_ / name / "record.json")) << name;
}

TEST_F(BadInput, SecondRunIntoTheSameFolder) {
  for (int film = 0; film < 3; ++film) write_small_film(films_, "film " + std::to_string(film), 60);
  RunningProgram first({"run", shipped_pipeline("extract-tube"), films_, "--out", results_});
  while (first.running() && !fs::exists(results_ / ".unfinished")) usleep(2000);
  ASSERT_TRUE(first.running());
  expect_cannot_start(run(), "Another run is writing");
  EXPECT_EQ(first.wait(), 0);
}

TEST_F(BadInput, UnknownWordsOnTheCommandLine) {
  EXPECT_EQ(run_program({"measure"}).status, 2);
  EXPECT_EQ(run_program({"run", "x.yaml"}).status, 2);
  expect_cannot_start(run_program({"check", folder_ / "none.yaml"}), "no pipeline file");
}

TEST_F(BadInput, CheckSaysWhatIsMissing) {
  add_good_film();
  fs::copy_file(films_ / "good.tif", films_ / "bare.tif");
  const auto outcome = run_program({"check", shipped_pipeline("extract-tube"), films_});
  EXPECT_EQ(outcome.status, 1) << outcome.output;
  EXPECT_NE(outcome.output.find("bare\n  cannot be used"), std::string::npos) << outcome.output;
  EXPECT_NE(outcome.output.find("pixel_size_um:"), std::string::npos) << outcome.output;
}

}  // namespace
}  // namespace wavefount
