#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include "step_registry.h"

namespace wavefount {

/// What `wavefount run` was asked to do.
struct RunOptions {
  std::filesystem::path pipeline;
  std::filesystem::path films;
  std::filesystem::path output;
  int jobs = 0;                   ///< threads in all; 0: one a core
  std::vector<std::string> only;  ///< acquisition names; empty: all
  bool again = false;             ///< ignore earlier results
};

/// Measures every acquisition of a folder and writes the tables. Returns the exit status: 0 all
/// done, 1 some failed, 130 interrupted. Throws Problem when it cannot start.
int run_folder(const RunOptions& options, const StepRegistry& registry);

}  // namespace wavefount
