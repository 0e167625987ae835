#pragma once

#include <gtest/gtest.h>
#include <unistd.h>

#include <filesystem>
#include <fstream>
#include <string>

namespace wavefount::testing {

/// A folder of its own for each test, removed at its end.
class WorkFolder : public ::testing::Test {
 protected:
  void SetUp() override {
    const auto* test = ::testing::UnitTest::GetInstance()->current_test_info();
    folder_ = std::filesystem::path(::testing::TempDir()) /
              (std::string("wavefount-") + test->test_suite_name() + "-" + test->name() + "-" +
               std::to_string(::getpid()));
    std::filesystem::remove_all(folder_);
    std::filesystem::create_directories(folder_);
  }
  void TearDown() override { std::filesystem::remove_all(folder_); }

  std::filesystem::path path(const std::string& name) const { return folder_ / name; }

  std::filesystem::path write_text(const std::string& name, const std::string& text) const {
    std::filesystem::create_directories(path(name).parent_path());
    std::ofstream(path(name), std::ios::binary) << text;
    return path(name);
  }

  std::filesystem::path folder_;
};

/// What `action` complains of; empty when it does not.
template <class Action>
std::string complaint(Action action) {
  try {
    action();
  } catch (const std::exception& problem) {
    return problem.what();
  }
  return {};
}

}  // namespace wavefount::testing
