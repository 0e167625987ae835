#include "wavefount/acquisition/csv_reader.h"

#include "work_folder.h"

namespace wavefount {
namespace {

using Csv = testing::WorkFolder;
using Rows = std::vector<std::vector<std::string>>;

TEST_F(Csv, ReadsQuotesMarksAndAnyLineEnd) {
  const auto table = read_csv(write_text("a.csv",
                                         "\xEF\xBB\xBF"
                                         "a,b\r\n\"x, \"\"y\"\"\",\"two\nlines\"\r\n\n3,\r4"));
  EXPECT_EQ(table.header, (std::vector<std::string>{"a", "b"}));
  EXPECT_EQ(table.rows, (Rows{{"x, \"y\"", "two\nlines"}, {"3", ""}, {"4", ""}}));
  EXPECT_EQ(table.lines, (std::vector<int>{2, 5, 6}));
  EXPECT_EQ(table.column("b"), 1);
  EXPECT_EQ(table.column("c"), -1);
}

TEST_F(Csv, TakesTheMostFrequentToleratedSeparator) {
  const auto table = read_csv(write_text("a.csv", "a;\"b;,,,\";c\n1,5;2;3\n"), ",;\t");
  EXPECT_EQ(table.header, (std::vector<std::string>{"a", "b;,,,", "c"}));
  EXPECT_EQ(table.rows, (Rows{{"1,5", "2", "3"}}));
  EXPECT_EQ(read_csv(write_text("b.csv", "one\n1\n"), ",;").rows, (Rows{{"1"}}));
}

TEST_F(Csv, SaysWhatIsWrongAndWhere) {
  const auto says = [&](const std::string& text) {
    return testing::complaint([&] { read_csv(write_text("a.csv", text)); });
  };
  EXPECT_NE(says("a,b\n1,\"open\n\n").find("line 2"), std::string::npos);
  EXPECT_NE(says("a,b\n1,2,3\n").find("line 2"), std::string::npos);
  EXPECT_NE(says("").find("empty"), std::string::npos);
  EXPECT_NE(says("\xFF\xFE"
                 "a")
                .find("UTF-16"),
            std::string::npos);
  EXPECT_NE(says("a\n" + std::string(20'000'000, 'x')).find("too long"), std::string::npos);
  EXPECT_NE(testing::complaint([&] { read_csv(path("none.csv")); }), "");
  EXPECT_NE(testing::complaint([&] { read_csv(folder_); }), "");
}

}  // namespace
}  // namespace wavefount
