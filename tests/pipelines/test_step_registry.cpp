#include <gtest/gtest.h>

#include <filesystem>
#include <fstream>

#include "step_registry.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

namespace fs = std::filesystem;

/// Copies of the test plug-ins, one folder a test.
class Plugins : public testing::Test {
 protected:
  void SetUp() override {
    folder_ = fs::path(testing::TempDir()) /
              testing::UnitTest::GetInstance()->current_test_info()->name();
    fs::remove_all(folder_);
    fs::create_directories(folder_);
  }

  fs::path copy(const std::string& plugin, const std::string& as) const {
    const auto target = folder_ / as;
    fs::copy_file(fs::path(TEST_PLUGINS) / plugin, target);
    return target;
  }

  fs::path write(const std::string& name, const std::string& bytes) const {
    std::ofstream(folder_ / name, std::ios::binary) << bytes;
    return folder_ / name;
  }

  /// The sentence with which a library is refused.
  static std::string refusal(const fs::path& library) {
    StepRegistry registry;
    EXPECT_FALSE(registry.open(library));
    return registry.refusals().empty() ? "" : registry.refusals().front();
  }

  fs::path folder_;
};

TEST_F(Plugins, GoodOneGivesWorkingSteps) {
  StepRegistry registry;
  ASSERT_TRUE(registry.open(copy("good.so", "good.so"))) << registry.refusals().front();
  EXPECT_EQ(registry.names(), std::vector<std::string>{"count-frames"});
  const auto step = registry.make("count-frames");
  EXPECT_EQ(step->GetReferenceCount(), 1) << "a reference is leaked";
  EXPECT_EQ(step->declaration().scope, Scope::acquisition);
}

TEST_F(Plugins, EachBadOneIsRefusedWithASentence) {
  EXPECT_NE(refusal(copy("no_load.so", "a.so")).find("has no itkLoad()"), std::string::npos);
  EXPECT_NE(refusal(copy("no_version.so", "b.so")).find("does not state its version"),
            std::string::npos);
  EXPECT_NE(refusal(copy("other_version.so", "c.so")).find("was built for 'wavefount 0.0.0"),
            std::string::npos);
  EXPECT_NE(refusal(copy("null_factory.so", "d.so")).find("gives no factory"), std::string::npos);
  EXPECT_NE(refusal(copy("throws.so", "e.so")).find("no licence for Mondays"), std::string::npos);
  EXPECT_NE(refusal(copy("missing_symbol.so", "f.so")).find("a_function_that_nobody_has"),
            std::string::npos);
  EXPECT_NE(refusal(write("empty.so", "")).find("it is empty"), std::string::npos);
  EXPECT_NE(refusal(write("random.so", std::string(5000, '\x5a'))).find("not a shared library"),
            std::string::npos);
  EXPECT_NE(refusal(folder_).find("not a regular file"), std::string::npos);
}

TEST_F(Plugins, CutShortAtAnyLengthIsRefused) {
  const auto whole = copy("good.so", "whole.so");
  const auto size = fs::file_size(whole);
  for (int eighth = 1; eighth < 8; ++eighth) {
    const auto cut = copy("good.so", "cut" + std::to_string(eighth) + ".so");
    fs::resize_file(cut, size * static_cast<std::uintmax_t>(eighth) / 8);
    const auto fault = refusal(cut);
    EXPECT_NE(fault.find("was left out"), std::string::npos) << eighth << ": " << fault;
  }
}

TEST_F(Plugins, TakenNameIsRefusedAndTheFirstStays) {
  StepRegistry registry;
  copy("good.so", "1.so");
  copy("also_good.so", "2.so");
  copy("null_factory.so", "3.so");
  registry.open_folders({folder_, folder_ / "missing"});
  ASSERT_EQ(registry.refusals().size(), 3U);
  EXPECT_NE(registry.refusals()[0].find("the step name 'count-frames' is taken"),
            std::string::npos);
  EXPECT_NE(registry.refusals()[2].find("does not exist"), std::string::npos);
  EXPECT_EQ(registry.library_of("count-frames").filename(), "1.so");
}

TEST_F(Plugins, UnknownNameGetsTheNearestOne) {
  StepRegistry registry;
  ASSERT_TRUE(registry.open(copy("good.so", "good.so")));
  try {
    registry.make("count-frame");
    FAIL();
  } catch (const Problem& problem) {
    EXPECT_NE(std::string(problem.what()).find("did you mean 'count-frames'?"), std::string::npos);
  }
}

}  // namespace
}  // namespace wavefount
