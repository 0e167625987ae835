#include <gtest/gtest.h>
#include <signal.h>
#include <unistd.h>

#include <map>

#include "program.h"
#include "small_films.h"

namespace wavefount {
namespace {

namespace fs = std::filesystem;

/// Every file below a folder with its bytes; record.json without its timings.
std::map<std::string, std::string> contents(const fs::path& folder) {
  std::map<std::string, std::string> files;
  for (const auto& entry : fs::recursive_directory_iterator(folder)) {
    if (!entry.is_regular_file() || entry.path().filename() == ".lock") continue;
    auto text = text_of(entry.path());
    if (entry.path().filename() == "record.json") text.resize(text.find("\"timings\""));
    files[entry.path().lexically_relative(folder)] = text;
  }
  return files;
}

void expect_same(const std::map<std::string, std::string>& left,
                 const std::map<std::string, std::string>& right) {
  ASSERT_EQ(left.size(), right.size());
  for (const auto& [name, text] : left) {
    ASSERT_TRUE(right.contains(name)) << name;
    EXPECT_TRUE(text == right.at(name)) << name << " differs";
  }
}

class Runs : public testing::Test {
 protected:
  void SetUp() override {
    folder_ = test_folder();
    films_ = folder_ / "films";
    fs::create_directories(films_);
  }

  std::vector<std::string> words(const std::string& results,
                                 const std::vector<std::string>& more = {}) const {
    std::vector<std::string> words = {"run", shipped_pipeline("extract-tube"), films_, "--out",
                                      folder_ / results};
    words.insert(words.end(), more.begin(), more.end());
    return words;
  }

  fs::path folder_, films_;
};

TEST_F(Runs, SameBytesAtAnyNumberOfThreads) {
  for (int film = 0; film < 2; ++film) write_small_film(films_, "film " + std::to_string(film), 70);
  ASSERT_EQ(run_program(words("one", {"--jobs", "1"})).status, 0);
  ASSERT_EQ(run_program(words("two", {"--jobs", "2"})).status, 0);
  ASSERT_EQ(run_program(words("five", {"--jobs", "5"})).status, 0);
  expect_same(contents(folder_ / "one"), contents(folder_ / "two"));
  expect_same(contents(folder_ / "one"), contents(folder_ / "five"));
}

TEST_F(Runs, GoOnAfterBeingKilledAndEndAlike) {
  for (int film = 0; film < 4; ++film) write_small_film(films_, "film " + std::to_string(film), 70);
  ASSERT_EQ(run_program(words("whole")).status, 0);

  RunningProgram killed(words("broken"));
  while (killed.running() && !fs::exists(folder_ / "broken" / "film 1" / "record.json"))
    usleep(2000);
  killed.signal(SIGKILL);
  ASSERT_EQ(killed.wait(), 128 + SIGKILL) << "it ended before it could be killed";
  const auto first = fs::last_write_time(folder_ / "broken" / "film 0" / "record.json");
  EXPECT_FALSE(fs::exists(folder_ / "broken" / "film 3" / "record.json"));

  const auto outcome = run_program(words("broken"));
  EXPECT_EQ(outcome.status, 0) << outcome.output;
  EXPECT_NE(outcome.output.find("as was  film 0"), std::string::npos) << outcome.output;
  EXPECT_EQ(fs::last_write_time(folder_ / "broken" / "film 0" / "record.json"), first);
  expect_same(contents(folder_ / "whole"), contents(folder_ / "broken"));
}

TEST_F(Runs, InterruptionIsPoliteAndKeepsWhatIsDone) {
  for (int film = 0; film < 4; ++film) write_small_film(films_, "film " + std::to_string(film), 70);
  RunningProgram stopped(words("results"));
  while (stopped.running() && !fs::exists(folder_ / "results" / "film 0" / "record.json"))
    usleep(2000);
  stopped.signal(SIGINT);
  EXPECT_EQ(stopped.wait(), 130);
  EXPECT_TRUE(fs::exists(folder_ / "results" / "film 0" / "record.json"));
  EXPECT_FALSE(fs::exists(folder_ / "results" / ".unfinished"));
}

TEST_F(Runs, OnlyAndAgainMeasureWhatIsAsked) {
  for (int film = 0; film < 2; ++film) write_small_film(films_, "film " + std::to_string(film));
  const auto record = [&](const std::string& film) {
    return folder_ / "results" / film / "record.json";
  };
  ASSERT_EQ(run_program(words("results", {"--only", "film 1"})).status, 0);
  EXPECT_FALSE(fs::exists(record("film 0")));
  ASSERT_EQ(run_program(words("results")).status, 0);
  EXPECT_TRUE(fs::exists(record("film 0")));
  const auto before_0 = fs::last_write_time(record("film 0"));
  const auto before_1 = fs::last_write_time(record("film 1"));
  ASSERT_EQ(run_program(words("results", {"--again", "--only", "film 1"})).status, 0);
  EXPECT_EQ(fs::last_write_time(record("film 0")), before_0);
  EXPECT_NE(fs::last_write_time(record("film 1")), before_1);
  EXPECT_NE(text_of(folder_ / "results" / "acquisitions.csv").find("film 0"), std::string::npos)
      << "a film that was not asked for fell out of the tables";
  EXPECT_EQ(run_program(words("results", {"--only", "film 7"})).status, 2);
}

TEST_F(Runs, AChangedFilmIsMeasuredAgain) {
  write_small_film(films_, "film", 24);
  ASSERT_EQ(run_program(words("results")).status, 0);
  const auto before = text_of(folder_ / "results" / "film" / "traces.csv");
  write_small_film(films_, "film", 30);
  const auto outcome = run_program(words("results"));
  ASSERT_EQ(outcome.status, 0) << outcome.output;
  EXPECT_NE(text_of(folder_ / "results" / "film" / "traces.csv"), before);
}

TEST_F(Runs, NuclearLabelsOfSingleImages) {
  write_small_film(films_, "still", 1);
  const auto outcome =
      run_program({"run", shipped_pipeline("nuclei-only"), films_, "--out", folder_ / "results"});
  EXPECT_EQ(outcome.status, 0) << outcome.output;
  EXPECT_TRUE(fs::exists(folder_ / "results" / "still" / "labels.tif"));
}

TEST_F(Runs, StepsDescribeThemselves) {
  const auto text = run_program({"steps", "find-nuclei"});
  EXPECT_EQ(text.status, 0);
  EXPECT_NE(text.output.find("smallest_radius_um"), std::string::npos) << text.output;
  EXPECT_NE(run_program({"steps", "--schema"}).output.find("2020-12"), std::string::npos);
  EXPECT_NE(run_program({"steps", "--json"}).output.find("\"find-waves\""), std::string::npos);
  EXPECT_EQ(run_program({"steps", "find-nucleus"}).status, 2);
}

}  // namespace
}  // namespace wavefount
