#include "outline_nuclei_step.h"

#include "wavefount/core/reduced_film.h"
#include "wavefount/nuclei/outline_nuclei.h"
#include "wavefount/nuclei/wall_glow.h"

namespace wavefount::nuclei {

StepDeclaration OutlineNuclei::declaration() const {
  StepDeclaration said;
  said.name = "outline-nuclei";
  said.sentence =
      "Outlines the candidates at half of their brightness over the local cytoplasm, parts "
      "touching "
      "ones, and measures area and brightness; drops what is no nucleus.";
  said.scope = Scope::frame;
  said.needs = {"film", "camera", "tubes", "reduced-film", "sightings"};
  said.makes = {"outlines"};
  said.parameters = {
      {"smallest_radius_um",
       ParameterKind::number,
       "um",
       0.1,
       200,
       "2.5",
       {},
       "An outline of a smaller radius is dropped; 2.5 leaves room below the smallest nucleus that "
       "is looked for."},
      {"largest_radius_um",
       ParameterKind::number,
       "um",
       0.5,
       1000,
       "40",
       {},
       "An outline of a larger radius is dropped; 30 leaves room above the largest nucleus that is "
       "looked for."},
      {"significance",
       ParameterKind::number,
       "1",
       1,
       50,
       "5",
       {},
       "Lowest brightness in units of its standard deviation; at 5 noise alone never passes."},
      {"slenderness",
       ParameterKind::number,
       "1",
       1.2,
       20,
       "3.5",
       {},
       "Greatest ratio of an outline's long to its short axis; nuclei, also deforming ones, stay "
       "below 3, threads and scratches lie above."},
      {"cloud_radius_um",
       ParameterKind::number,
       "um",
       1,
       1000,
       "10",
       {},
       "An outline of this radius or more whose edge is as soft as a Gaussian's is the spreading "
       "content of a nucleus that has just entered mitosis, not a nucleus; smaller ones may be "
       "nuclei blurred by the optics."}};
  return said;
}

void OutlineNuclei::process(FrameWork& frame, const RecordStore& film) const {
  auto& sightings = frame.observation.sightings;
  if (!frame.observation.usable || frame.pixels.IsNull() || sightings.empty()) return;
  const auto& described = film.get<FilmDescription>();
  const auto& reduced = film.get<ReducedFilm>();
  OutlineLimits limits;
  limits.smallest_radius_px = parameters().number("smallest_radius_um") / described.pixel_um;
  limits.largest_radius_px = parameters().number("largest_radius_um") / described.pixel_um;
  limits.significance = parameters().number("significance");
  limits.slenderest = parameters().number("slenderness");
  limits.cloud_radius_px = parameters().number("cloud_radius_um") / described.pixel_um;
  const ReducedGrid grid{reduced.left(), reduced.top(), reduced.factor(), reduced.width(),
                         reduced.height()};
  const TubeMask tubes(film.get<Tubes>(), grid, described.pixel_um, frame.observation.shift_x_px,
                       frame.observation.shift_y_px);
  ImagePointer pixels = frame.pixels;
  ImagePointer sharpest = frame.sharpest.IsNull() ? frame.pixels : frame.sharpest;
  if (const auto* wall = frame.extras.peek<GlowOfFrame>()) {
    pixels = without_glow(*frame.pixels, grid, wall->glow);
    sharpest = sharpest == frame.pixels ? pixels : without_glow(*sharpest, grid, wall->glow);
  }
  sightings =
      outline_nuclei({*sharpest, *pixels, tubes, film.get<CameraModel>()}, sightings, limits);
}

}  // namespace wavefount::nuclei
