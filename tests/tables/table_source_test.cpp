#include "wavefount/tables/table_source.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <set>

#include "fake_records.h"
#include "wavefount/core/doubts.h"
#include "wavefount/core/film.h"
#include "wavefount/core/interphase.h"
#include "wavefount/core/prescan.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"
#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"

namespace wavefount {
namespace {

/// The contract's columns, in its order; further ones may follow.
const std::map<std::string, std::string> contract = {
    {"traces",
     "acquisition nucleus frame time_min found x_px y_px x_um y_um area_um2 brightness cytoplasm "
     "nc_ratio integrated"},
    {"nuclei",
     "acquisition nucleus parent first_seen_min last_seen_min x_um y_um along_um across_um "
     "end_distance_um wall_distance_um nearest_um territory_um2 cycles period_min period_se_min "
     "brightness import_rate_per_min notes"},
    {"cycles",
     "acquisition nucleus cycle wave start formed_min entry_min entry_se_min half_loss_min outcome "
     "x_um y_um along_um across_um import_rate_per_min import_rate_se_per_min import_initial "
     "import_initial_se import_relative_per_min import_total_per_min plateau brightness_mean "
     "brightness_peak brightness_at_age nc_ratio_peak radius_um neighbour_delay_min "
     "neighbour_delay_se_min timing lead_probability"},
    {"waves",
     "acquisition wave cycle nuclei start_min end_min period_min fate slowness_min_per_um "
     "slowness_se_min_per_um speed_um_per_min speed_lo_um_per_min speed_hi_um_per_min answer site "
     "origins review reasons"},
    {"fronts",
     "acquisition wave origin direction from_um to_um nuclei slowness_min_per_um "
     "slowness_se_min_per_um speed_um_per_min speed_lo_um_per_min speed_hi_um_per_min"},
    {"origins",
     "acquisition wave origin claimed probability nucleus x_um y_um along_um across_um "
     "position_se_um entry_min prominence_min prominence_se_min basin_nuclei site chance_of_site "
     "chance_of_site_smooth brightness_percentile import_percentile territory_percentile "
     "period_ratio period_ratio_slowest"},
    {"review",
     "acquisition wave reason detail priority verdict origins_accepted comment reviewer "
     "decided_at"},
    {"acquisitions",
     "acquisition status message frames duration_min frame_interval_min pixel_um tube_width_um "
     "tube_length_um left_end right_end nuclei waves waves_in_review drift_um bleaching_percent "
     "signal_to_noise last_healthy_min"}};

class Tables : public testing::Test {
 protected:
  void use(RecordStore records) { records_ = std::move(records); }

  Table table(const std::string& name) {
    const AcquisitionView view{records_, "film", messages_};
    for (const auto& source : all_tables(view))
      if (source.name == name) return collected(source);
    ADD_FAILURE() << "no table " << name;
    return {};
  }

  static const Cell& cell(const Table& table, std::size_t row, const std::string& column) {
    const auto at = std::find_if(table.columns.begin(), table.columns.end(),
                                 [&](const Column& one) { return one.name == column; });
    EXPECT_NE(at, table.columns.end()) << column;
    return table.rows.at(row).at(static_cast<std::size_t>(at - table.columns.begin()));
  }

  static double number(const Table& table, std::size_t row, const std::string& column) {
    const auto& value = cell(table, row, column);
    if (const auto* integer = std::get_if<std::int64_t>(&value))
      return static_cast<double>(*integer);
    const auto* real = std::get_if<double>(&value);
    EXPECT_NE(real, nullptr) << column << " has no number";
    return real ? *real : std::nan("");
  }

  static std::string text(const Table& table, std::size_t row, const std::string& column) {
    const auto* value = std::get_if<std::string>(&cell(table, row, column));
    return value ? *value : std::string();
  }

  static bool empty(const Table& table, std::size_t row, const std::string& column) {
    return std::holds_alternative<std::monostate>(cell(table, row, column));
  }

  RecordStore records_;
  Messages messages_;
};

TEST_F(Tables, HaveTheContractsColumnsInOrder) {
  ASSERT_EQ(declared_tables().size(), contract.size());
  for (const auto& [name, columns] : contract) {
    const auto expected = split(columns, ' ');
    const auto& declared = declared_table(name).columns;
    ASSERT_GE(declared.size(), expected.size()) << name;
    for (std::size_t i = 0; i < expected.size(); ++i) EXPECT_EQ(declared[i].name, expected[i]);
  }
}

TEST_F(Tables, ExplainEveryColumnAndSpellUnitsOut) {
  for (const auto& table : declared_tables()) {
    std::set<std::string> names, headings;
    for (const auto& column : table.columns) {
      EXPECT_TRUE(names.insert(column.name).second) << column.name;
      EXPECT_TRUE(headings.insert(column.heading).second) << column.heading;
      EXPECT_TRUE(column.explanation.ends_with('.')) << table.name << ' ' << column.name;
      if (column.name.ends_with("_um") || column.name.ends_with("_um_per_min")) {
        EXPECT_NE(column.heading.find("micrometre"), std::string::npos) << column.name;
      }
      if (column.name.ends_with("_min")) {
        EXPECT_NE(column.heading.find("minute"), std::string::npos) << column.name;
      }
    }
  }
  EXPECT_THROW(declared_table("no-such"), Problem);
}

TEST_F(Tables, SayWhatTheRecordsHold) {
  fake::Scene scene;
  use(fake::records_of(scene));
  const auto nuclei = table("nuclei");
  ASSERT_EQ(nuclei.rows.size(), 12U);
  EXPECT_NEAR(number(nuclei, 0, "along_um"), 60, 1e-9);
  EXPECT_NEAR(number(nuclei, 0, "across_um"), -40, 1e-9);
  EXPECT_NEAR(number(nuclei, 0, "wall_distance_um"), 60, 1e-9);
  EXPECT_NEAR(number(nuclei, 0, "period_min"), scene.period_min, 1e-9);
  EXPECT_NEAR(number(nuclei, 0, "period_se_min"), 0.12 * std::sqrt(2.0), 1e-9);
  EXPECT_NEAR(number(nuclei, 0, "import_rate_per_min"), 0.2, 1e-9);
  const auto traces = table("traces");
  EXPECT_EQ(traces.rows.size(), 12U * 60U);
  EXPECT_EQ(text(traces, 0, "found"), "yes");
  EXPECT_GT(number(traces, 0, "nc_ratio"), 2.5);
  const auto waves = table("waves");
  ASSERT_EQ(waves.rows.size(), 2U);
  EXPECT_EQ(text(waves, 0, "answer"), "single");
  EXPECT_EQ(text(waves, 0, "site"), "interior");
  EXPECT_EQ(number(waves, 0, "origins"), 1);
  EXPECT_EQ(number(waves, 0, "speed_um_per_min"), 40);
  EXPECT_TRUE(empty(waves, 0, "period_min"));
  EXPECT_EQ(table("fronts").rows.size(), 4U);
  EXPECT_EQ(table("origins").rows.size(), 4U);
}

TEST_F(Tables, GiveAnInterphaseAlreadyPresentNeitherImportNorPeriod) {
  use(fake::records_of({}));
  auto& first = records_.edit<Interphases>().interphases.front();
  ASSERT_EQ(first.start, Start::already_present);
  first.import = ImportFit{};
  first.import->rate_per_min = 0.3;
  const auto cycles = table("cycles");
  EXPECT_EQ(text(cycles, 0, "start"), "already-present");
  EXPECT_TRUE(empty(cycles, 0, "import_rate_per_min"));
  EXPECT_TRUE(empty(cycles, 0, "import_initial"));
  EXPECT_TRUE(empty(cycles, 0, "formed_min"));
  EXPECT_TRUE(empty(cycles, 0, "period_min"));
  EXPECT_FALSE(empty(cycles, 0, "entry_min"));
  EXPECT_NEAR(number(cycles, 1, "period_min"), 25, 1e-9);
}

TEST_F(Tables, CountAnUnfinishedInterphaseOnFromTheOneBefore) {
  use(fake::records_of({}));
  const auto cycles = table("cycles");
  for (std::size_t row = 0; row < cycles.rows.size(); ++row) {
    if (text(cycles, row, "outcome") != "unfinished") continue;
    EXPECT_EQ(number(cycles, row, "cycle"), 3);
    EXPECT_TRUE(empty(cycles, row, "wave"));
    EXPECT_EQ(text(cycles, row, "timing"), "none");
    return;
  }
  FAIL() << "no unfinished interphase in the scene";
}

TEST_F(Tables, LeaveRatiosEmptyWithoutTheDarkOffset) {
  use(fake::records_of({}));
  records_.edit<CameraModel>().offset_given = false;
  EXPECT_TRUE(empty(table("traces"), 0, "nc_ratio"));
}

TEST_F(Tables, LeaveDistancesToWhatIsNotInViewEmpty) {
  use(fake::records_of({}));
  auto& tube = records_.edit<Tube>();
  tube.left_end = tube.right_end = tube.upper_wall = tube.lower_wall = Boundary::open;
  const auto nuclei = table("nuclei");
  EXPECT_TRUE(empty(nuclei, 0, "end_distance_um"));
  EXPECT_TRUE(empty(nuclei, 0, "wall_distance_um"));
  EXPECT_EQ(text(table("acquisitions"), 0, "left_end"), "open");
}

TEST_F(Tables, DescribeTheAcquisition) {
  fake::Scene scene;
  scene.drift_px = 7;
  use(fake::records_of(scene));
  auto& film = records_.edit<FilmDescription>();
  film.sheet_columns = {"batch", "condition"};
  film.sheet = {{"batch", "B1"}};
  messages_.warn("One thing.");
  const auto acquisitions = table("acquisitions");
  ASSERT_EQ(acquisitions.rows.size(), 1U);
  EXPECT_EQ(text(acquisitions, 0, "status"), "done");
  EXPECT_EQ(text(acquisitions, 0, "message"), "One thing.");
  EXPECT_EQ(number(acquisitions, 0, "duration_min"), 59);
  EXPECT_EQ(number(acquisitions, 0, "nuclei"), 12);
  EXPECT_NEAR(number(acquisitions, 0, "drift_um"), 14, 1e-9);
  EXPECT_EQ(text(acquisitions, 0, "sheet_batch"), "B1");
  EXPECT_TRUE(empty(acquisitions, 0, "sheet_condition"));
}

TEST_F(Tables, ListDoubtsByPriority) {
  use(fake::records_of({}));
  auto& waves = records_.edit<Waves>().waves;
  waves[0].review = true;
  waves[0].reasons = {"few nuclei", "timing"};
  waves[0].reason_details = {"Only five."};
  waves[1].review = true;
  waves[1].answer = Answer::ambiguous;
  records_.put(Doubts{{{"focus", "Blurred.", 0.95}}});
  records_.edit<Tube>().doubts = {"The right end is faint."};
  const auto review = table("review");
  ASSERT_EQ(review.rows.size(), 5U);
  EXPECT_EQ(text(review, 0, "reason"), "focus");
  EXPECT_TRUE(empty(review, 0, "wave"));
  EXPECT_EQ(text(review, 1, "reason"), "ambiguous");
  EXPECT_EQ(text(review, 2, "detail"), "The right end is faint.");
  EXPECT_EQ(text(review, 3, "detail"), "Only five.");
  EXPECT_TRUE(empty(review, 4, "detail"));
  EXPECT_TRUE(empty(review, 4, "verdict"));
}

TEST_F(Tables, AreEmptyWhereNothingWasMeasured) {
  use(fake::nuclei_only_records_of({}));
  EXPECT_EQ(table("nuclei").rows.size(), 12U);
  for (const auto* name : {"cycles", "waves", "fronts", "origins", "review"})
    EXPECT_TRUE(table(name).rows.empty()) << name;
  use({});
  for (const auto* name : {"traces", "nuclei", "cycles", "waves"})
    EXPECT_TRUE(table(name).rows.empty()) << name;
  EXPECT_EQ(table("acquisitions").rows.size(), 1U);
}

TEST_F(Tables, WorkForASingleFrameWithoutTube) {
  fake::Scene scene;
  scene.frames = 1;
  scene.tube = false;
  use(fake::nuclei_only_records_of(scene));
  const auto acquisitions = table("acquisitions");
  EXPECT_TRUE(empty(acquisitions, 0, "frame_interval_min"));
  EXPECT_TRUE(empty(acquisitions, 0, "tube_width_um"));
  EXPECT_TRUE(empty(acquisitions, 0, "bleaching_percent"));
  EXPECT_EQ(table("traces").rows.size(), 12U);
}

}  // namespace
}  // namespace wavefount
