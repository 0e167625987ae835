#include <utility>

#include "steps.h"
#include "wavefount/core/film.h"
#include "wavefount/core/prescan.h"
#include "wavefount/core/tube.h"
#include "wavefount/tube/find_tubes.h"
#include "wavefount/tube/frame_plan.h"
#include "wavefount/tube/scan_ahead.h"

namespace wavefount::tube {

StepDeclaration ScanAhead::declaration() const {
  StepDeclaration said;
  said.name = "scan-ahead";
  said.sentence =
      "Reads a few frames spread over the film, aligns them, and estimates the camera's gain, read "
      "noise and offset where the sidecar does not give them.";
  said.scope = Scope::acquisition;
  said.needs = {"film"};
  said.makes = {"camera", "prescan"};
  said.parameters = {
      {"frames",
       ParameterKind::integer,
       "1",
       1,
       200,
       "32",
       {},
       "Frames read ahead; 32 make the median image nearly free of noise and of passing nuclei."},
      {"noise_pairs",
       ParameterKind::integer,
       "1",
       1,
       100,
       "8",
       {},
       "Pairs of consecutive frames compared for the camera's noise; eight give the gain to a few "
       "per cent."},
      {"smallest_radius_um",
       ParameterKind::number,
       "um",
       0.3,
       200,
       "4",
       {},
       "Radius of the smallest nucleus to be found; frames are reduced until it has 1.5 pixels, "
       "and nuclei of extract and embryo re-form at 4 um or more."},
      {"largest_radius_um",
       ParameterKind::number,
       "um",
       0.5,
       500,
       "25",
       {},
       "Radius of the largest nucleus; bright things up to this size are taken off before the "
       "keyframes' shifts are sought. Nuclei of cycling extract stay below 25 um."}};
  return said;
}

void ScanAhead::process(AcquisitionWork& work) const {
  ScanSettings settings;
  settings.frames = parameters().integer("frames");
  settings.noise_pairs = parameters().integer("noise_pairs");
  settings.smallest_radius_um = parameters().number("smallest_radius_um");
  settings.largest_radius_um = parameters().number("largest_radius_um");
  auto result = scan_ahead(*work.source, settings, *work.messages);
  work.records->put(std::move(result.camera));
  work.records->put(std::move(result.prescan));
}

StepDeclaration FindTube::declaration() const {
  StepDeclaration said;
  said.name = "find-tube";
  said.sentence =
      "Finds the tube or tubes: outline, axis, width, and which ends and walls are in view, with "
      "bubbles and excluded regions as holes.";
  said.scope = Scope::acquisition;
  said.needs = {"film", "prescan", "camera"};
  said.makes = {"tubes"};
  said.parameters = {
      {"tube",
       ParameterKind::choice,
       "",
       std::nullopt,
       std::nullopt,
       "automatic",
       {"automatic", "none"},
       "none: no outline is looked for and the whole field is measured, for single images of "
       "nuclei."},
      {"wall_glow_um",
       ParameterKind::number,
       "um",
       1,
       100,
       "12",
       {},
       "Bright lines up to this width are a glowing wall and no tube; walls glow over a few um, "
       "blurred by the optics."},
      {"narrowest_um",
       ParameterKind::number,
       "um",
       5,
       1000,
       "40",
       {},
       "Width of the narrowest tube or embryo; tubes in use are 100 um or wider."},
      {"smallest_bubble_um",
       ParameterKind::number,
       "um",
       3,
       1000,
       "20",
       {},
       "Diameter of the smallest dark region that counts as a bubble; smaller gaps stop no wave."}};
  return said;
}

void FindTube::process(AcquisitionWork& work) const {
  TubeSettings settings;
  settings.automatic = parameters().text("tube") == "automatic";
  settings.wall_glow_um = parameters().number("wall_glow_um");
  settings.narrowest_um = parameters().number("narrowest_um");
  settings.smallest_bubble_um = parameters().number("smallest_bubble_um");
  work.records->put(find_tubes(work.records->get<FilmDescription>(), work.records->get<Prescan>(),
                               settings, *work.messages));
}

StepDeclaration PlanReduction::declaration() const {
  StepDeclaration said;
  said.name = "plan-reduction";
  said.sentence =
      "Lays out the work file of reduced frames, cropped to the tubes, and what frames are "
      "compared with.";
  said.scope = Scope::acquisition;
  said.needs = {"film", "prescan", "camera", "tubes"};
  said.makes = {"reduced-film", "frame-plan"};
  said.parameters = {{"margin_um",
                      ParameterKind::number,
                      "um",
                      0,
                      1000,
                      "25",
                      {},
                      "Kept around the tubes, beyond the drift seen ahead; a nucleus at the wall "
                      "and its surroundings need some 25 um."},
                     {"largest_radius_um",
                      ParameterKind::number,
                      "um",
                      0.5,
                      500,
                      "25",
                      {},
                      "Radius of the largest nucleus; bright things up to this size do not count "
                      "when a jump is looked for. Nuclei of cycling extract stay below 25 um."}};
  return said;
}

void PlanReduction::process(AcquisitionWork& work) const {
  const auto& film = work.records->get<FilmDescription>();
  const auto& prescan = work.records->get<Prescan>();
  const auto& tubes = work.records->get<Tubes>();
  const auto crop = plan_crop(film, prescan, tubes, parameters().number("margin_um"));
  auto reduced = make_reduced_film(film, prescan, crop, work.scratch);
  work.records->put(plan_frames(film, prescan, work.records->get<CameraModel>(), tubes, *reduced,
                                parameters().number("largest_radius_um")));
  work.records->share(std::move(reduced));
}

}  // namespace wavefount::tube
