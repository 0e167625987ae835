#include <gtest/gtest.h>

#include <algorithm>
#include <limits>

#include "wavefount/core/text.h"

namespace wavefount {
namespace {

TEST(Text, NumbersReadBackAndHaveAPoint) {
  EXPECT_EQ(number_text(0.1), "0.1");
  EXPECT_EQ(number_text(-0.0), "0");
  EXPECT_EQ(number_text(std::numeric_limits<double>::quiet_NaN()), "");
  EXPECT_EQ(parse_number(number_text(1.0 / 3)), 1.0 / 3);
  EXPECT_EQ(rounded_text(3.14159265, 3), "3.14");
}

TEST(Text, ParsesWholeTextOnly) {
  EXPECT_EQ(parse_number(" +2.5 "), 2.5);
  EXPECT_FALSE(parse_number("2.5um"));
  EXPECT_FALSE(parse_number(""));
  EXPECT_FALSE(parse_number("inf"));
  EXPECT_FALSE(parse_integer("2.0"));
  EXPECT_EQ(parse_integer("-12"), -12);
}

TEST(Text, NaturalOrder) {
  std::vector<std::string> names = {"film 10", "film 2", "film 02", "Film 1", "film", "film 2b"};
  std::sort(names.begin(), names.end(), natural_less);
  const std::vector<std::string> expected = {"Film 1", "film",    "film 02",
                                             "film 2", "film 2b", "film 10"};
  EXPECT_EQ(names, expected);
  EXPECT_FALSE(natural_less("a", "a"));
}

TEST(Text, SplitsAndJoins) {
  EXPECT_EQ(split("a,,b", ','), (std::vector<std::string>{"a", "", "b"}));
  EXPECT_EQ(joined({"a", "b"}, "; "), "a; b");
  EXPECT_EQ(trimmed(" \t a b \n"), "a b");
}

}  // namespace
}  // namespace wavefount
