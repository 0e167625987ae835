#include "wavefount/core/step.h"

#include "wavefount/core/problem.h"

namespace wavefount {

Step::Step() = default;
Step::~Step() = default;

void Step::configure(const std::map<std::string, std::string>& given) {
  const auto declared = declaration();
  try {
    parameters_ = Parameters(declared.parameters, given);
  } catch (const Problem& problem) {
    throw Problem("Step '" + declared.name + "': " + problem.what());
  }
}

FrameStep::FrameStep() = default;
FrameStep::~FrameStep() = default;
AcquisitionStep::AcquisitionStep() = default;
AcquisitionStep::~AcquisitionStep() = default;
FolderStep::FolderStep() = default;
FolderStep::~FolderStep() = default;

}  // namespace wavefount
