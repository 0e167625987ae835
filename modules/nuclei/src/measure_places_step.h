#pragma once

#include "wavefount/core/step.h"

namespace wavefount::nuclei {

/// The second touch of the film: fixed-aperture signal at every nucleus' place.
class MeasurePlaces : public AcquisitionStep {
 public:
  using Self = MeasurePlaces;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(MeasurePlaces, AcquisitionStep);

  StepDeclaration declaration() const override;
  void process(AcquisitionWork& work) const override;
};

}  // namespace wavefount::nuclei
