#pragma once

#include "wavefount/core/step.h"

namespace wavefount::nuclei {

/// Candidates of one frame: FrameObservation::sightings with place, radius and detection_sigma.
class FindNuclei : public FrameStep {
 public:
  using Self = FindNuclei;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(FindNuclei, FrameStep);

  StepDeclaration declaration() const override;
  void process(FrameWork& frame, const RecordStore& film) const override;
};

}  // namespace wavefount::nuclei
