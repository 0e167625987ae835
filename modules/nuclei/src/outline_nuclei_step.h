#pragma once

#include "wavefount/core/step.h"

namespace wavefount::nuclei {

/// Outlines and measures the candidates of one frame at full size; drops those that are no nuclei.
class OutlineNuclei : public FrameStep {
 public:
  using Self = OutlineNuclei;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(OutlineNuclei, FrameStep);

  StepDeclaration declaration() const override;
  void process(FrameWork& frame, const RecordStore& film) const override;
};

}  // namespace wavefount::nuclei
