#include "find_nuclei_step.h"

#include "wavefount/core/problem.h"
#include "wavefount/core/reduced_film.h"
#include "wavefount/nuclei/find_nuclei.h"
#include "wavefount/nuclei/wall_glow.h"

namespace wavefount::nuclei {

StepDeclaration FindNuclei::declaration() const {
  StepDeclaration said;
  said.name = "find-nuclei";
  said.sentence =
      "Finds candidate nuclei in the reduced frame: maxima of the scale-normalised Laplacian in "
      "units of its noise.";
  said.scope = Scope::frame;
  said.needs = {"film", "camera", "tubes", "reduced-film", "reduced-frame"};
  said.makes = {"sightings"};
  said.parameters = {
      {"smallest_radius_um",
       ParameterKind::number,
       "um",
       0.3,
       200,
       "4",
       {},
       "Radius of the smallest nucleus to look for; nuclei of extract and embryo re-form at 4 um "
       "or "
       "more."},
      {"largest_radius_um",
       ParameterKind::number,
       "um",
       0.5,
       500,
       "25",
       {},
       "Radius of the largest nucleus to look for; nuclei of cycling extract stay below 25 um."},
      {"threshold_sigma",
       ParameterKind::number,
       "1",
       3,
       50,
       "5.5",
       {},
       "Lowest response in units of its noise; at 5.5 noise alone gives about one candidate in "
       "fifty frames of 750 x 250 reduced pixels."},
      {"roundness",
       ParameterKind::number,
       "1",
       0,
       0.9,
       "0.2",
       {},
       "Lowest ratio of the two curvatures of a candidate; an edge or a thread has 0, a disc 1, a "
       "nucleus twice as long as wide about 0.35."}};
  return said;
}

void FindNuclei::process(FrameWork& frame, const RecordStore& film) const {
  frame.observation.sightings.clear();
  if (!frame.observation.usable || frame.reduced.IsNull()) return;
  const auto& described = film.get<FilmDescription>();
  const auto& reduced = film.get<ReducedFilm>();
  DetectionSettings settings;
  settings.smallest_radius_um = parameters().number("smallest_radius_um");
  settings.largest_radius_um = parameters().number("largest_radius_um");
  settings.thresholds.sigma = parameters().number("threshold_sigma");
  settings.thresholds.roundness = parameters().number("roundness");
  if (settings.largest_radius_um < settings.smallest_radius_um)
    throw Problem(
        "The step find-nuclei has a largest_radius_um below its smallest_radius_um; correct the "
        "pipeline.");
  const ReducedGrid grid{reduced.left(), reduced.top(), reduced.factor(), reduced.width(),
                         reduced.height()};
  const TubeMask tubes(film.get<Tubes>(), grid, described.pixel_um, frame.observation.shift_x_px,
                       frame.observation.shift_y_px);
  const auto found =
      find_nuclei(*frame.reduced, tubes, film.get<CameraModel>(), described.pixel_um, settings);
  frame.observation.sightings = found.candidates;
  if (!found.glow.empty()) frame.extras.put(GlowOfFrame{found.glow});
  if (frame.observation.noise <= 0) frame.observation.noise = found.noise;
}

}  // namespace wavefount::nuclei
