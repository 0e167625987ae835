#include <gtest/gtest.h>
#include <unistd.h>

#include <filesystem>
#include <fstream>

#include "pipeline.h"
#include "pipeline_file.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

std::filesystem::path file_with(const std::string& text) {
  const auto path = std::filesystem::path(testing::TempDir()) /
                    ("pipeline_test_" + std::to_string(::getpid()) + ".yaml");
  std::ofstream(path) << text;
  return path;
}

std::string refusal(const std::string& text) {
  try {
    read_pipeline_file(file_with(text));
  } catch (const Problem& problem) {
    return problem.what();
  }
  return {};
}

TEST(PipelineFile, ReadsStepsAndParameters) {
  const auto pipeline = read_pipeline_file(
      file_with("pipeline: mine\nchannels: {reporter: GFP}\nseed: 7\nsteps:\n  - one\n"
                "  - two:\n      limit: 3\n"));
  EXPECT_EQ(pipeline.name, "mine");
  EXPECT_EQ(pipeline.reporter, "GFP");
  EXPECT_EQ(pipeline.seed, 7U);
  ASSERT_EQ(pipeline.steps.size(), 2U);
  EXPECT_EQ(pipeline.steps[1].parameters.at("limit"), "3");
  EXPECT_EQ(pipeline.steps[1].line, 6);
}

TEST(PipelineFile, RefusesWithLineAndColumn) {
  EXPECT_NE(refusal("steps:\n  - one\n  - [two").find("line 3, column 1: this is not valid YAML"),
            std::string::npos)
      << refusal("steps:\n  - one\n  - [two");
  EXPECT_NE(refusal("steps:\n  - one\nsed: 3\n").find("line 3, column 1"), std::string::npos);
  EXPECT_NE(refusal("steps:\n  - one\nsed: 3\n").find("did you mean 'seed'?"), std::string::npos);
  EXPECT_NE(refusal("steps: one\n").find("takes a list"), std::string::npos);
  EXPECT_NE(refusal("steps:\n  - one: 3\n").find("'name: value' lines"), std::string::npos);
  EXPECT_NE(refusal("steps:\n  - one:\n      a: 1\n      a: 2\n").find("stands twice"),
            std::string::npos);
  EXPECT_NE(refusal("pipeline: x\n").find("names no steps"), std::string::npos);
  EXPECT_NE(refusal("").find("empty"), std::string::npos);
  EXPECT_THROW(read_pipeline_file("/no/such/file.yaml"), Problem);
}

/// The registry with the one step of the test plug-in.
class Faults : public testing::Test {
 protected:
  static StepRegistry& registry() {
    static StepRegistry registry = [] {
      StepRegistry made;
      made.open(std::filesystem::path(TEST_PLUGINS) / "good.so");
      return made;
    }();
    return registry;
  }

  static std::vector<std::string> faults(const std::string& text) {
    return faults_of(read_pipeline_file(file_with(text)), registry());
  }
};

TEST_F(Faults, FindsEachKind) {
  EXPECT_TRUE(faults("steps:\n  - count-frames\n").empty());
  EXPECT_NE(faults("steps:\n  - count-framse\n").at(0).find("did you mean 'count-frames'"),
            std::string::npos);
  EXPECT_NE(faults("steps:\n  - count-frames:\n      offset: 11\n").at(0).find("0 to 10"),
            std::string::npos);
  EXPECT_NE(faults("steps:\n  - count-frames:\n      ofset: 1\n").at(0).find("known are: offset"),
            std::string::npos);
  EXPECT_NE(faults("steps:\n  - count-frames\n  - count-frames\n").at(0).find("stands twice"),
            std::string::npos);
}

TEST_F(Faults, MakesTheStepsWithParametersAsUsed) {
  const auto pipeline = make_pipeline(
      read_pipeline_file(file_with("steps:\n  - count-frames:\n      offset: 2\n")), registry());
  ASSERT_EQ(pipeline.before.size(), 1U);
  EXPECT_EQ(pipeline.before[0]->parameters().integer("offset"), 2);
}

}  // namespace
}  // namespace wavefount
