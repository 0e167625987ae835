#pragma once

#include "wavefount/core/step.h"

namespace wavefount::tube {

/// The film's first look: a few spread frames, their shifts, the camera.
class ScanAhead : public AcquisitionStep {
 public:
  using Self = ScanAhead;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(ScanAhead, AcquisitionStep);

  StepDeclaration declaration() const override;
  void process(AcquisitionWork& work) const override;
};

class FindTube : public AcquisitionStep {
 public:
  using Self = FindTube;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(FindTube, AcquisitionStep);

  StepDeclaration declaration() const override;
  void process(AcquisitionWork& work) const override;
};

class PlanReduction : public AcquisitionStep {
 public:
  using Self = PlanReduction;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(PlanReduction, AcquisitionStep);

  StepDeclaration declaration() const override;
  void process(AcquisitionWork& work) const override;
};

class ReduceFrames : public FrameStep {
 public:
  using Self = ReduceFrames;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(ReduceFrames, FrameStep);

  StepDeclaration declaration() const override;
  void process(FrameWork& frame, const RecordStore& film) const override;
};

class RegisterFrames : public FrameStep {
 public:
  using Self = RegisterFrames;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(RegisterFrames, FrameStep);

  StepDeclaration declaration() const override;
  void process(FrameWork& frame, const RecordStore& film) const override;
};

class RemoveDrift : public AcquisitionStep {
 public:
  using Self = RemoveDrift;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(RemoveDrift, AcquisitionStep);

  StepDeclaration declaration() const override;
  void process(AcquisitionWork& work) const override;
};

}  // namespace wavefount::tube
