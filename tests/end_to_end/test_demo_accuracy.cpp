#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <iostream>

#include "program.h"
#include "wavefount/core/robust.h"
#include "wavefount/synthetic/score.h"

namespace wavefount {
namespace {

/// The demo, measured once for all tests of this file by the program as a person would.
class DemoAccuracy : public testing::Test {
 protected:
  static void SetUpTestSuite() {
    const auto folder = std::filesystem::path(testing::TempDir()) / "wavefount_demo_accuracy";
    std::filesystem::remove_all(folder);
    const auto demo = run_program({"demo", folder, "--seed", "1"});
    ASSERT_EQ(demo.status, 0) << demo.output;
    const auto run = run_program(
        {"run", shipped_pipeline("extract-tube"), folder / "films", "--out", folder / "results"});
    ASSERT_EQ(run.status, 0) << run.output;
    report() = score_results(folder / "results", folder / "truth");
    print(report(), std::cout);
    results() = folder / "results";
  }

  static ScoreReport& report() {
    static ScoreReport report;
    return report;
  }

  static std::filesystem::path& results() {
    static std::filesystem::path folder;
    return folder;
  }

  static double share(long hit, long of) {
    return of == 0 ? 0 : static_cast<double>(hit) / static_cast<double>(of);
  }

  static const FilmScore& film(const std::string& name) {
    for (const auto& score : report().films) {
      if (score.name == name) return score;
    }
    throw std::runtime_error("the demo has no film " + name);
  }
};

TEST_F(DemoAccuracy, NucleiAreFoundAndFollowed) {
  const auto& all = report().all;
  const double recall = share(all.nuclei_found, all.nuclei_found + all.nuclei_missed);
  const double precision = share(all.nuclei_found, all.nuclei_found + all.nuclei_invented);
  EXPECT_GE(2 * recall * precision / (recall + precision), 0.97);
  EXPECT_GE(*all.links.value(), 0.97);
  EXPECT_GE(*all.identities.value(), 0.98);
}

TEST_F(DemoAccuracy, EntriesAreFoundAndTimed) {
  const auto& all = report().all;
  EXPECT_GE(*all.entries.value(), 0.97);
  EXPECT_LE(share(all.entries_invented, all.entries.of), 0.02);
  std::vector<double> errors;
  for (const double error : all.entry_errors) errors.push_back(std::abs(error));
  ASSERT_GE(errors.size(), 500U);
  EXPECT_LE(median(errors), 0.2);
  EXPECT_LE(quantile(errors, 0.95), 1.0);
}

TEST_F(DemoAccuracy, ImportRatesAreUnbiased) {
  ASSERT_GE(report().all.rate_errors.size(), 300U);
  EXPECT_LE(std::abs(median(report().all.rate_errors)), 0.10);
  EXPECT_LE(std::abs(median(report().all.initial_errors)), 0.10);
}

TEST_F(DemoAccuracy, WavesAreFoundAndTheirSpeed) {
  const auto& all = report().all;
  EXPECT_GE(*all.waves.value(), 0.95);
  EXPECT_GE(*all.speeds.value(), 0.95);
  std::vector<double> errors;
  for (const double error : all.speed_errors) errors.push_back(std::abs(error));
  EXPECT_LE(median(errors), 0.05);
}

TEST_F(DemoAccuracy, OriginsAreRight) {
  EXPECT_GE(*report().all.origin_waves.value(), 0.90);
  // A wave cut by the end of the film may show a source twice, once on either side of the cut.
  const auto claimed = report().all.origins_right + report().all.origins_invented;
  EXPECT_LE(share(report().all.origins_invented, claimed), 0.04);
}

TEST_F(DemoAccuracy, NothingIsClaimedWhereNothingCanBeKnown) {
  EXPECT_EQ(film("empty").waves_invented, 0) << "a wave in an empty tube";
  for (const auto* name : {"together", "open-end"}) {
    EXPECT_EQ(film(name).origins_right + film(name).origins_invented, 0) << name;
  }
  const auto outside = film("open-end").answers;
  EXPECT_GE(outside.count({"enters-view", "enters-view"}), 1U);
}

TEST_F(DemoAccuracy, EveryFilmHasItsPicturesAndTables) {
  for (const auto& score : report().films) {
    const auto folder = results() / score.name;
    for (const auto* file : {"kymograph.png", "map.png", "montage.png", "curves.png", "traces.csv",
                             "nuclei.csv", "cycles.csv", "waves.csv", "fronts.csv", "origins.csv",
                             "review.csv", "acquisitions.csv", "record.json"})
      EXPECT_TRUE(std::filesystem::exists(folder / file)) << folder / file;
  }
  EXPECT_TRUE(std::filesystem::exists(results() / "workbook.xlsx"));
}

}  // namespace
}  // namespace wavefount
