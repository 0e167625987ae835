#include "steps.h"
#include "wavefount/core/reduced_film.h"
#include "wavefount/tube/frame_choice.h"
#include "wavefount/tube/frame_plan.h"

namespace wavefount::tube {

StepDeclaration ReduceFrames::declaration() const {
  StepDeclaration said;
  said.name = "reduce-frames";
  said.sentence =
      "Reduces each frame within the crop, keeps it in the work file, and judges whether it is of "
      "use.";
  said.scope = Scope::frame;
  said.needs = {"film", "reduced-film", "tubes", "frame-plan"};
  said.makes = {"reduced-frame"};
  return said;
}

void ReduceFrames::process(FrameWork& frame, const RecordStore& film) const {
  auto& observation = frame.observation;
  observation.frame = frame.frame;
  const auto why = kept_out(film.get<FilmDescription>(), frame.frame);
  if (!why.empty() && observation.usable) {
    observation.usable = false;
    observation.problem = why;
  }
  if (frame.pixels.IsNull()) return;
  const auto& reduced = film.get<ReducedFilm>();
  frame.reduced = reduce_frame(*frame.pixels, reduced, film.get<FramePlan>(), observation);
  reduced.write(frame.frame, *frame.reduced);
}

StepDeclaration RegisterFrames::declaration() const {
  StepDeclaration said;
  said.name = "register-frames";
  said.sentence =
      "Measures the shift of each frame by what stands still: phase correlation for jumps, least "
      "squares at standing edges for fractions of a pixel.";
  said.scope = Scope::frame;
  said.needs = {"prescan", "reduced-film", "frame-plan", "reduced-frame"};
  said.makes = {"shift"};
  return said;
}

void RegisterFrames::process(FrameWork& frame, const RecordStore& film) const {
  if (frame.reduced.IsNull()) return;
  register_frame(*frame.reduced, film.get<FramePlan>(), film.get<ReducedFilm>().factor(),
                 frame.observation);
}

}  // namespace wavefount::tube
