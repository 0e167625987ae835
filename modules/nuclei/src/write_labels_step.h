#pragma once

#include "wavefount/core/step.h"

namespace wavefount::nuclei {

/// Writes labels.tif into the acquisition's output.
class WriteLabels : public AcquisitionStep {
 public:
  using Self = WriteLabels;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(WriteLabels, AcquisitionStep);

  StepDeclaration declaration() const override;
  void process(AcquisitionWork& work) const override;
};

}  // namespace wavefount::nuclei
