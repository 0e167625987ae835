#pragma once

#include <string>
#include <vector>

#include "pipeline_file.h"
#include "step_registry.h"
#include "wavefount/core/step.h"

namespace wavefount {

/// A pipeline whose steps are made, configured and known to fit together.
struct Pipeline {
  PipelineFile file;
  std::vector<AcquisitionStep::Pointer> before;  ///< the stream, once a film
  std::vector<FrameStep::Pointer> stream;        ///< frame by frame
  std::vector<AcquisitionStep::Pointer> after;   ///< once a tube
  std::vector<FolderStep::Pointer> folder;       ///< once, over everything
};

/// Everything that is wrong with a pipeline before any pixel is read, a sentence each: unknown
/// step, wrong parameter, a need that no earlier step makes, steps of the scopes out of order.
std::vector<std::string> faults_of(const PipelineFile& file, const StepRegistry& registry);

/// Makes and configures the steps. Throws Problem with the first of faults_of().
Pipeline make_pipeline(const PipelineFile& file, const StepRegistry& registry);

}  // namespace wavefount
