#pragma once

#include <itkObjectFactory.h>

#include "wavefount/core/step.h"

namespace wavefount {

class NumberCyclesStep : public AcquisitionStep {
 public:
  using Self = NumberCyclesStep;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(NumberCyclesStep, AcquisitionStep);

  StepDeclaration declaration() const override;
  void process(AcquisitionWork& work) const override;
};

class FindWavesStep : public AcquisitionStep {
 public:
  using Self = FindWavesStep;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(FindWavesStep, AcquisitionStep);

  StepDeclaration declaration() const override;
  void process(AcquisitionWork& work) const override;
};

class FindOriginsStep : public AcquisitionStep {
 public:
  using Self = FindOriginsStep;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(FindOriginsStep, AcquisitionStep);

  StepDeclaration declaration() const override;
  void process(AcquisitionWork& work) const override;
};

}  // namespace wavefount
