#pragma once

#include <CLI/App.hpp>

namespace wavefount {

/// Adds `wavefount score RESULTS TRUTH`: results against the truth of demo scenes.
void add_score_command(CLI::App& app, int& status);

}  // namespace wavefount
