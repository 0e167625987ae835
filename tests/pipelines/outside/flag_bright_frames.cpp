#include <opencv2/core.hpp>

#include "wavefount/core/plugin.h"
#include "wavefount/core/prescan.h"

namespace {

using namespace wavefount;

/// Flags frames whose reporter is brighter than a limit; the least that a frame step can do.
class FlagBrightFrames : public FrameStep {
 public:
  using Self = FlagBrightFrames;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(FlagBrightFrames, FrameStep);

  StepDeclaration declaration() const override {
    return {"flag-bright-frames",
            "Leaves out frames whose mean is above a limit.",
            Scope::frame,
            {"film"},
            {},
            {{"limit_counts", ParameterKind::number, "counts", 0, {}, "1000", {}, "The limit."}}};
  }

  void process(FrameWork& frame, const RecordStore&) const override {
    const auto pixels = as_matrix(*frame.pixels);
    if (cv::mean(pixels)[0] <= parameters().number("limit_counts")) return;
    frame.observation.usable = false;
    frame.observation.problem = "it is brighter than the plug-in's limit";
  }
};

}  // namespace

WAVEFOUNT_PLUGIN("Steps for the test of the installed package.", FlagBrightFrames)
