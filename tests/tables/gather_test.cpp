#include "wavefount/tables/gather.h"

#include <gtest/gtest.h>

#include "fake_results.h"
#include "scratch_folder.h"
#include "wavefount/acquisition/csv_reader.h"
#include "wavefount/tables/table_source.h"

namespace wavefount {
namespace {

class Gather : public testing::Test {
 protected:
  void SetUp() override {
    fake::Scene scene;
    scene.waves = 1;
    for (const auto* name : {"film 2", "film 10"}) {
      scene.name = name;
      work_.acquisitions.push_back(fake::write_acquisition(folder_.path(), scene));
    }
    work_.output = folder_.path();
    work_.messages = &messages_;
  }

  CsvTable root(const std::string& table) const {
    return read_csv(folder_.path() / (table + ".csv"));
  }

  fake::ScratchFolder folder_;
  Messages messages_;
  FolderWork work_;
};

TEST_F(Gather, JoinsRowsInOrderUnderOneHeader) {
  gather_tables(work_);
  for (const auto& declared : declared_tables()) {
    const auto joined = root(declared.name);
    const auto first = read_csv(folder_.path() / "film 2" / (declared.name + ".csv"));
    const auto second = read_csv(folder_.path() / "film 10" / (declared.name + ".csv"));
    EXPECT_EQ(joined.header, first.header);
    auto rows = first.rows;
    rows.insert(rows.end(), second.rows.begin(), second.rows.end());
    EXPECT_EQ(joined.rows, rows) << declared.name;
    EXPECT_FALSE(std::filesystem::exists(folder_.path() / (declared.name + ".csv.part")));
  }
  EXPECT_TRUE(messages_.all().empty());
}

TEST_F(Gather, GivesFailedAcquisitionsARowAndUnitesSheetColumns) {
  work_.acquisitions.push_back({"=broken",
                                {},
                                false,
                                "It is not a TIFF, \"truly\".",
                                {{"temperature_c", "-4.5"}, {"batch", "@x"}},
                                {"temperature_c", "batch"}});
  gather_tables(work_);
  const auto table = root("acquisitions");
  ASSERT_EQ(table.rows.size(), 3U);
  const auto cell = [&](std::size_t row, const char* column) {
    return table.rows[row][static_cast<std::size_t>(table.column(column))];
  };
  EXPECT_EQ(cell(2, "acquisition"), "'=broken");
  EXPECT_EQ(cell(2, "status"), "failed");
  EXPECT_EQ(cell(2, "message"), "It is not a TIFF, \"truly\".");
  EXPECT_EQ(cell(2, "nuclei"), "");
  EXPECT_EQ(cell(2, "sheet_temperature_c"), "-4.5");
  EXPECT_EQ(cell(2, "sheet_batch"), "'@x");
  EXPECT_EQ(cell(0, "sheet_batch"), "007");
  EXPECT_EQ(cell(0, "sheet_temperature_c"), "");
  EXPECT_EQ(root("waves").rows.size(), 2U);
}

TEST_F(Gather, LeavesOutAndNamesATableThatIsCutShortOrForeign) {
  const auto cut = folder_.path() / "film 2" / "waves.csv";
  auto bytes = fake::bytes_of(cut);
  fake::write_bytes(cut, bytes.substr(0, bytes.size() - 5));
  fake::write_bytes(folder_.path() / "film 10" / "nuclei.csv", "other,columns\r\n1,2\r\n");
  std::filesystem::remove(folder_.path() / "film 10" / "acquisitions.csv");
  gather_tables(work_);
  EXPECT_EQ(root("waves").rows.size(), 1U);
  EXPECT_EQ(root("nuclei").rows.size(), 12U);
  EXPECT_EQ(root("acquisitions").rows.size(), 1U);
  ASSERT_EQ(messages_.all().size(), 3U);
  EXPECT_NE(messages_.summary().find("film 2/waves.csv"), std::string::npos);
}

TEST_F(Gather, WritesHeadersAloneForAnEmptyFolder) {
  work_.acquisitions.clear();
  gather_tables(work_);
  for (const auto& declared : declared_tables()) {
    EXPECT_TRUE(root(declared.name).rows.empty());
    EXPECT_EQ(root(declared.name).header.size(), declared.columns.size());
  }
}

}  // namespace
}  // namespace wavefount
