#include "wavefount/tables/csv_writer.h"

#include <gtest/gtest.h>

#include <cmath>
#include <limits>

#include "scratch_folder.h"
#include "wavefount/acquisition/csv_reader.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

TEST(CsvNumber, HasSixSignificantDigits) {
  EXPECT_EQ(csv_number(1234.56789, false), "1234.57");
  EXPECT_EQ(csv_number(0.000123456789, false), "0.000123457");
  EXPECT_EQ(csv_number(-2.5, false), "-2.5");
  EXPECT_EQ(csv_number(12345678, false), "12345700");
  EXPECT_EQ(csv_number(0, false), "0");
}

TEST(CsvNumber, KeepsFourDecimalsOfTimes) {
  EXPECT_EQ(csv_number(1234.56789, true), "1234.5679");
  EXPECT_EQ(csv_number(0.0123456789, true), "0.0123457");
  EXPECT_EQ(csv_number(120, true), "120");
}

TEST(CsvNumber, IsEmptyForWhatIsNotFinite) {
  EXPECT_EQ(csv_number(std::nan(""), false), "");
  EXPECT_EQ(csv_number(std::numeric_limits<double>::infinity(), true), "");
}

TEST(CsvNumber, TakesTheLargestAndSmallestDoubles) {
  EXPECT_EQ(csv_number(std::numeric_limits<double>::max(), true), "1.7976931348623157e+308");
  EXPECT_EQ(csv_number(5e-324, false), "5e-324");
}

TEST(CsvText, DefusesFormulas) {
  EXPECT_EQ(csv_text("=1+1"), "'=1+1");
  EXPECT_EQ(csv_text("+cmd"), "'+cmd");
  EXPECT_EQ(csv_text("-x"), "'-x");
  EXPECT_EQ(csv_text("@A1"), "'@A1");
  EXPECT_EQ(csv_text("\t=1"), "'\t=1");
  EXPECT_EQ(csv_text(" =1"), "' =1");
  EXPECT_EQ(csv_text("a=1"), "a=1");
  EXPECT_EQ(csv_text("-4.5"), "-4.5");
}

TEST(CsvText, IsValidUtf8WithoutZeroBytes) {
  EXPECT_EQ(csv_text("caf\xe9"), "caf\xEF\xBF\xBD");
  EXPECT_EQ(csv_text(std::string("a\0b", 3)), "a b");
  EXPECT_EQ(csv_text("été µ"), "été µ");
}

TEST(CsvWriter, WritesWhatTheReaderReadsBack) {
  const fake::ScratchFolder folder;
  const auto file = folder.path() / "table.csv";
  const std::vector<Column> columns = {{"name", "", ColumnKind::text, 0, ""},
                                       {"count", "", ColumnKind::integer, 0, ""},
                                       {"time_min", "", ColumnKind::number, 0, ""}};
  CsvWriter writer(file);
  writer.header(columns);
  writer.row({std::string("a, \"b\"\nc"), std::int64_t{-3}, 100.00004});
  writer.row({Cell(), Cell(), std::nan("")});
  EXPECT_FALSE(std::filesystem::exists(file)) << "the file is there before it is complete";
  writer.commit();
  EXPECT_EQ(fake::bytes_of(file), "name,count,time_min\r\n\"a, \"\"b\"\"\nc\",-3,100\r\n,,\r\n");
  const auto table = read_csv(file);
  ASSERT_EQ(table.rows.size(), 2U);
  EXPECT_EQ(table.rows[0][0], "a, \"b\"\nc");
}

TEST(CsvWriter, LeavesNothingBehindWhenGivenUp) {
  const fake::ScratchFolder folder;
  {
    CsvWriter writer(folder.path() / "table.csv");
    writer.header({{"name", "", ColumnKind::text, 0, ""}});
  }
  EXPECT_TRUE(std::filesystem::is_empty(folder.path()));
}

TEST(CsvWriter, SaysThatItCannotWrite) {
  EXPECT_THROW(CsvWriter("/no/such/folder/table.csv"), Problem);
}

}  // namespace
}  // namespace wavefount
