#pragma once

#include "wavefount/core/plugin.h"

namespace wavefount {

/// A step for the loader's tests: leaves a note.
class CountingStep : public AcquisitionStep {
 public:
  using Self = CountingStep;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(CountingStep, AcquisitionStep);

  StepDeclaration declaration() const override {
    return {"count-frames",
            "Notes how many frames the film has.",
            Scope::acquisition,
            {"film"},
            {"frame-count"},
            {{"offset", ParameterKind::integer, "1", 0, 10, "0", {}, "Added to the count."}}};
  }

  void process(AcquisitionWork& work) const override {
    const int frames = work.records->get<FilmDescription>().frames + parameters().integer("offset");
    work.messages->note("The film has " + std::to_string(frames) + " frames.");
  }
};

}  // namespace wavefount
