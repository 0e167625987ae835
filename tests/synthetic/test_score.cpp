#include <gtest/gtest.h>

#include <algorithm>
#include <fstream>
#include <iterator>
#include <sstream>

#include "perfect_results.h"
#include "scenes.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"
#include "wavefount/synthetic/score.h"
#include "wavefount/synthetic/truth.h"

namespace wavefount {
namespace {

namespace fs = std::filesystem;

Scene two_tubes() {
  auto recipe = small_recipe();
  recipe.name = "film one";
  recipe.tubes = 2;
  recipe.view_um = 1500;
  recipe.frames = 160;
  recipe.sources = {{0.15, 0, 10, 40}, {0.85, 0, 15, 40}};
  recipe.drift_um_per_hour = 10;
  return build_scene(recipe);
}

class Score : public testing::Test {
 protected:
  void SetUp() override {
    folder_ =
        fs::path(testing::TempDir()) /
        (std::string("score-") + testing::UnitTest::GetInstance()->current_test_info()->name());
    fs::remove_all(folder_);
    write_truth(scene_, folder_ / "truth");
    tables_ = perfect_results(scene_);
  }
  void TearDown() override { fs::remove_all(folder_); }

  FilmScore score() {
    write_results(tables_, folder_ / "results");
    report_ = score_results(folder_ / "results", folder_ / "truth");
    return report_.all;
  }

  std::vector<Cells>& rows(const std::string& table) { return tables_.at(table); }
  static void shift(Cells& row, const std::string& column, double by) {
    row.at(column) = number_text(*parse_number(row.at(column)) + by);
  }

  const Scene scene_ = two_tubes();
  fs::path folder_;
  ResultTables tables_;
  ScoreReport report_;
};

TEST_F(Score, PerfectResultsGetPerfectFigures) {
  const auto s = score();
  EXPECT_GT(s.nuclei_found, 2000);
  EXPECT_EQ(s.nuclei_missed, 0);
  EXPECT_EQ(s.nuclei_invented, 0);
  EXPECT_EQ(s.links.value(), 1);
  EXPECT_EQ(s.identities.value(), 1);
  EXPECT_EQ(s.entries.value(), 1);
  EXPECT_EQ(s.entries_invented, 0);
  for (const double error : s.entry_errors) EXPECT_NEAR(error, 0, 1e-3);
  EXPECT_EQ(s.entry_intervals.value(), 1);
  EXPECT_EQ(s.rates.value(), 1);
  for (const double error : s.rate_errors) EXPECT_NEAR(error, 0, 1e-5);
  for (const double error : s.initial_errors) EXPECT_NEAR(error, 0, 1e-5);
  EXPECT_EQ(s.waves.value(), 1);
  EXPECT_EQ(s.waves_invented, 0);
  EXPECT_EQ(s.fates.value(), 1);
  EXPECT_EQ(s.speeds.value(), 1);
  EXPECT_EQ(s.speed_intervals.value(), 1);
  EXPECT_GE(s.origins_right, 4);
  EXPECT_EQ(s.origins_missed + s.origins_invented, 0);
  EXPECT_EQ(s.origin_waves.value(), 1);
  EXPECT_EQ(s.sites.value(), 1);
  for (const auto& [pair, count] : s.answers) EXPECT_EQ(pair.first, pair.second) << count;
  EXPECT_TRUE(report_.notes.empty());
}

TEST_F(Score, LostAndInventedNucleiAreCounted) {
  auto& traces = rows("traces");
  const auto all = static_cast<long>(traces.size());
  long lost = 0;
  for (std::size_t i = 0; i < traces.size(); i += 10) {
    traces[i].at("found") = "no";
    ++lost;
  }
  Cells ghost = traces[1];
  ghost.at("x_px") = "3";
  ghost.at("y_px") = "3";
  traces.insert(traces.end(), 25, ghost);
  const auto s = score();
  EXPECT_EQ(s.nuclei_found, all - lost);
  EXPECT_EQ(s.nuclei_missed, lost);
  EXPECT_EQ(s.nuclei_invented, 25);
}

TEST_F(Score, AnIdentitySwapBreaksOneLinkAndOneIdentity) {
  const auto before = score();
  auto& traces = rows("traces");
  const auto nucleus = traces[0].at("nucleus");
  const auto acquisition = traces[0].at("acquisition");
  int last_frame = -1;
  bool after_gap = false;
  for (auto& row : traces) {  // from the second interphase on it is called another
    if (row.at("nucleus") != nucleus || row.at("acquisition") != acquisition) continue;
    const int frame = static_cast<int>(*parse_integer(row.at("frame")));
    after_gap = after_gap || (last_frame >= 0 && frame > last_frame + 1);
    last_frame = frame;
    if (after_gap) row.at("nucleus") = "9999";
  }
  ASSERT_TRUE(after_gap);
  const auto s = score();
  EXPECT_EQ(s.links.hit, before.links.hit);
  EXPECT_EQ(s.identities.hit, before.identities.hit - 1);
  for (auto& row : traces)
    if (row.at("nucleus") == "9999" && parse_integer(row.at("frame")) == last_frame)
      row.at("nucleus") = nucleus;
  EXPECT_EQ(score().links.hit, before.links.hit - 1);
}

TEST_F(Score, EntryTimesShiftedByHalfAFrameShowAsThat) {
  const double interval = scene_.times_min[1];
  for (auto& row : rows("cycles")) shift(row, "entry_min", interval / 2);
  const auto s = score();
  EXPECT_NEAR(median(s.entry_errors), 0.5, 1e-3);
  EXPECT_EQ(s.entry_intervals.hit, 0);  // ± 1.96 · 0.1 min does not reach 0.375 min
  for (auto& row : rows("cycles")) row.at("entry_se_min") = "0.2";
  EXPECT_EQ(score().entry_intervals.value(), 1);
}

TEST_F(Score, LostAndInventedEntriesAreCounted) {
  auto& cycles = rows("cycles");
  const auto all = static_cast<long>(cycles.size());
  cycles[3].at("outcome") = "lost";
  cycles[4].at("outcome") = "unfinished";
  Cells wrong_time = cycles[5];
  shift(wrong_time, "entry_min", 15);
  Cells wrong_place = cycles[6];
  shift(wrong_place, "y_um", 45);
  cycles.push_back(wrong_time);
  cycles.push_back(wrong_place);
  const auto s = score();
  EXPECT_EQ(s.entries.of, all);
  EXPECT_EQ(s.entries.hit, all - 2);
  EXPECT_EQ(s.entries_invented, 2);
}

TEST_F(Score, ImportErrorsAndTheirIntervals) {
  for (auto& row : rows("cycles")) {
    row.at("import_rate_per_min") = number_text(1.2 * *parse_number(row.at("import_rate_per_min")));
    row.at("import_initial") = "";
  }
  const auto s = score();
  EXPECT_NEAR(median(s.rate_errors), 0.2, 1e-4);
  EXPECT_LT(*s.rate_intervals.value(), 0.05);
  EXPECT_TRUE(s.initial_errors.empty());
}

TEST_F(Score, SpeedErrorsAndIntervals) {
  for (auto& row : rows("waves")) {
    if (row.at("speed_um_per_min").empty()) continue;
    row.at("speed_um_per_min") = number_text(1.1 * scene_.waves.speed_um_per_min);
    row.at("speed_lo_um_per_min") = number_text(1.05 * scene_.waves.speed_um_per_min);
    row.at("speed_hi_um_per_min") = "";
  }
  const auto s = score();
  EXPECT_NEAR(median(s.speed_errors), 0.1, 1e-6);
  EXPECT_EQ(s.speed_intervals.hit, 0);
  for (auto& row : rows("waves")) row.at("speed_lo_um_per_min") = "20";
  EXPECT_EQ(score().speed_intervals.value(), 1);  // no upper limit holds everything above
}

TEST_F(Score, AWaveCutInTwoIsFoundOnceAndInventedOnce) {
  int kept = 0;
  for (auto& row : rows("cycles"))
    if (row.at("wave") == "2" && row.at("acquisition") == scene_.name && ++kept > 8)
      row.at("wave") = "77";
  ASSERT_GT(kept, 8);
  Cells piece = rows("waves")[0];
  piece.at("wave") = "77";
  piece.at("answer") = "ambiguous";
  rows("waves").push_back(piece);
  const auto s = score();
  EXPECT_EQ(s.waves.value(), 1);
  EXPECT_EQ(s.waves_invented, 1);
  EXPECT_EQ(s.answers.at({"none", "ambiguous"}), 1);
}

TEST_F(Score, OriginsMissedMisplacedAndRepeated) {
  const auto whole = score();
  auto& origins = rows("origins");
  origins[0].at("claimed") = "no";
  shift(origins[1], "x_um", 300);
  origins.push_back(origins[2]);
  const auto s = score();
  EXPECT_EQ(s.origins_right, whole.origins_right - 2);
  EXPECT_EQ(s.origins_missed, 2);
  EXPECT_EQ(s.origins_invented, 2);
  EXPECT_LT(s.origin_waves.hit, whole.origin_waves.hit);
}

TEST_F(Score, NothingFoundIsEverythingMissed) {
  const auto whole = score();
  tables_ = {};
  const auto s = score();
  EXPECT_EQ(s.nuclei_missed, whole.nuclei_found);
  EXPECT_EQ(s.entries.hit, 0);
  EXPECT_EQ(s.entries.of, whole.entries.of);
  EXPECT_EQ(s.waves.hit, 0);
  EXPECT_EQ(s.origins_missed, whole.origins_right);
  EXPECT_FALSE(report_.films[0].has_results);
}

TEST_F(Score, AnAcquisitionWithoutTruthIsNotedAndLeftOut) {
  Cells stranger = rows("cycles")[0];
  stranger.at("acquisition") = "another film";
  rows("cycles").push_back(stranger);
  EXPECT_EQ(score().entries_invented, 0);
  ASSERT_EQ(report_.notes.size(), 1u);
  EXPECT_NE(report_.notes[0].find("another film"), std::string::npos);
}

TEST_F(Score, TablesInTheAcquisitionsFoldersServeWhereTheRootHasNone) {
  write_results(tables_, folder_ / "results" / "film one");
  const auto report = score_results(folder_ / "results", folder_ / "truth");
  EXPECT_EQ(report.all.entries.value(), 1);
}

TEST_F(Score, ReportsAreReadableTextCsvAndJson) {
  score();
  std::ostringstream text;
  print(report_, text);
  EXPECT_NE(text.str().find("film one"), std::string::npos);
  EXPECT_NE(text.str().find("entries found"), std::string::npos);
  write_score_csv(report_, folder_ / "score.csv");
  std::ifstream in(folder_ / "score.csv");
  const std::string csv(std::istreambuf_iterator<char>(in), {});
  EXPECT_EQ(std::count(csv.begin(), csv.end(), '\n'), 3);
  EXPECT_NE(score_json(report_).find("\"detection_f1\": 1.0"), std::string::npos);
}

TEST_F(Score, RefusesFoldersThatHoldNothing) {
  fs::create_directories(folder_ / "empty");
  EXPECT_THROW(score_results(folder_ / "empty", folder_ / "truth"), Problem);
  EXPECT_THROW(score_results(folder_ / "nowhere", folder_ / "truth"), Problem);
  write_results(tables_, folder_ / "results");
  EXPECT_THROW(score_results(folder_ / "results", folder_ / "empty"), Problem);
}

TEST_F(Score, RefusesATableThatIsNotOne) {
  write_results(tables_, folder_ / "results");
  std::ofstream(folder_ / "results" / "cycles.csv") << "acquisition,wave\nfilm one,x\n";
  EXPECT_THROW(score_results(folder_ / "results", folder_ / "truth"), Problem);
}

TEST(ScoreOfTogether, AnyClaimedOriginIsInvented) {
  auto recipe = small_recipe();
  recipe.waves.together = true;
  recipe.waves.jitter_min = 0.02;
  const Scene scene = build_scene(recipe);
  const auto folder = fs::path(testing::TempDir()) / "score-together";
  fs::remove_all(folder);
  write_truth(scene, folder / "truth");
  auto tables = perfect_results(scene);
  const auto place =
      point_at(scene.tubes[0], scene.sources[0].along_um, scene.sources[0].across_um);
  tables["origins"].push_back({{"acquisition", scene.name},
                               {"wave", tables.at("waves")[0].at("wave")},
                               {"claimed", "yes"},
                               {"x_um", number_text(place.x)},
                               {"y_um", number_text(place.y)},
                               {"site", "interior"}});
  write_results(tables, folder / "results");
  const auto report = score_results(folder / "results", folder / "truth");
  EXPECT_EQ(report.all.origins_invented, 1);
  EXPECT_EQ(report.all.origin_waves.of, 0);
  EXPECT_EQ(report.all.speeds.of, 0);
  fs::remove_all(folder);
}

}  // namespace
}  // namespace wavefount
