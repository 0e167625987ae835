#pragma once

#include <CLI/App.hpp>

namespace wavefount {

/// Adds `wavefount demo DIR`: acquisitions with known truth, a scenario of our own.
void add_demo_command(CLI::App& app, int& status);

}  // namespace wavefount
