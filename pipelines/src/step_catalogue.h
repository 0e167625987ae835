#pragma once

#include <string>
#include <vector>

#include "step_registry.h"

namespace wavefount {

/// Every step (or those named) as text for a person. Throws Problem for an unknown name.
std::string steps_as_text(const StepRegistry& registry, const std::vector<std::string>& only);
/// The same as JSON: a list of steps with scope, needs, makes and parameters.
std::string steps_as_json(const StepRegistry& registry, const std::vector<std::string>& only);
/// JSON Schema (2020-12) of pipeline files, from the steps' own declarations.
std::string pipeline_schema(const StepRegistry& registry);
/// The same as a Markdown table, for the README.
std::string steps_as_markdown(const StepRegistry& registry);

}  // namespace wavefount
