#pragma once

#include <filesystem>
#include <optional>

#include "step_registry.h"

namespace wavefount {

/// Prints everything that can be known before pixels are read: what is wrong with the pipeline, and
/// for each acquisition of the folder what was understood, what is missing and how to supply it.
/// Returns 0 when nothing is wrong, 1 when some acquisitions cannot be used, 2 when the pipeline
/// cannot run.
int check(const std::filesystem::path& pipeline, const std::optional<std::filesystem::path>& folder,
          const StepRegistry& registry);

}  // namespace wavefount
