#include <gtest/gtest.h>

#include "wavefount/core/parameters.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

std::vector<ParameterDeclaration> declared() {
  return {{"radius_um", ParameterKind::number, "um", 1, 100, "4", {}, "A radius."},
          {"frames", ParameterKind::integer, "1", 2, {}, "", {}, "Frames; from the data."},
          {"tube", ParameterKind::choice, "", {}, {}, "automatic", {"automatic", "none"}, "Which."},
          {"debris", ParameterKind::yes_no, "", {}, {}, "no", {}, "Keep debris."}};
}

std::string refusal(const std::map<std::string, std::string>& given) {
  try {
    const Parameters parameters(declared(), given);
  } catch (const Problem& problem) {
    return problem.what();
  }
  return {};
}

TEST(Parameters, TakesDefaultsAndGivenValues) {
  const Parameters parameters(declared(), {{"radius_um", "7.5"}, {"debris", "yes"}});
  EXPECT_EQ(parameters.number("radius_um"), 7.5);
  EXPECT_FALSE(parameters.optional_number("frames"));
  EXPECT_EQ(parameters.text("tube"), "automatic");
  EXPECT_TRUE(parameters.yes("debris"));
}

TEST(Parameters, RefusesWithNameRangeAndUnit) {
  EXPECT_EQ(refusal({{"radius_um", "0.5"}}),
            "The parameter 'radius_um' is '0.5'; it takes 1 to 100 um.");
  EXPECT_NE(refusal({{"radius_um", "4 px"}}).find("a number"), std::string::npos);
  EXPECT_NE(refusal({{"radius_um", "nan"}}).find("a number"), std::string::npos);
  EXPECT_NE(refusal({{"frames", "2.5"}}).find("a whole number"), std::string::npos);
  EXPECT_NE(refusal({{"tube", "some"}}).find("automatic, none"), std::string::npos);
  EXPECT_NE(refusal({{"debris", "maybe"}}).find("yes or no"), std::string::npos);
  EXPECT_NE(refusal({{"radius", "4"}}).find("known are: radius_um"), std::string::npos);
}

TEST(Parameters, AsksForNoUndeclaredName) {
  const Parameters parameters(declared(), {});
  EXPECT_THROW(parameters.number("speed"), Problem);
  EXPECT_THROW(parameters.number("frames"), Problem);
}

}  // namespace
}  // namespace wavefount
