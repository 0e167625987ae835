#pragma once

#include <filesystem>
#include <string>
#include <vector>

namespace wavefount {

/// What a run of the program left behind.
struct Outcome {
  int status = 0;      ///< exit status; 128 + signal when killed
  std::string output;  ///< standard output and error together
};

/// Runs build/bin/wavefount with these words and waits for it.
Outcome run_program(const std::vector<std::string>& words);

/// Starts the program without waiting; its output goes nowhere.
class RunningProgram {
 public:
  explicit RunningProgram(const std::vector<std::string>& words);
  ~RunningProgram();
  RunningProgram(const RunningProgram&) = delete;
  RunningProgram& operator=(const RunningProgram&) = delete;

  void signal(int number) const;
  bool running();
  /// Waits for the end; the exit status as in Outcome.
  int wait();

 private:
  int process_ = -1;
  int status_ = -1;
};

/// An empty folder of the running test's own.
std::filesystem::path test_folder();

/// The shipped pipeline file of this name.
std::filesystem::path shipped_pipeline(const std::string& name);

std::string text_of(const std::filesystem::path& file);

}  // namespace wavefount
