#pragma once

#include <string>
#include <vector>

#include "wavefount/synthetic/scene.h"

namespace wavefount {

/// Where a source of waves lies, as shares so that one recipe serves tubes of any size.
struct SourceRecipe {
  double along = 0.5;  ///< 0 left end, 1 right end of the tube in view; outside [0, 1]: not in view
  double across = 0;   ///< −1 upper wall, 1 lower wall
  double first_min = 8;  ///< its first mitosis
  double period_min = 40;
};

/// How to lay out a scene. Plain numbers with sensible values; build_scene draws the rest.
struct SceneRecipe {
  std::string name = "scene";
  std::uint64_t seed = 1;
  double view_um = 2000;       ///< length of the image, µm, 200 to 20000
  double pixel_um = 1.3;       ///< 0.2 to 5
  int frames = 160;            ///< 1 to 20000
  double interval_min = 0.75;  ///< 0.05 to 10
  double tube_width_um = 200;  ///< 60 to 1000
  int tubes = 1;               ///< side by side
  double gap_um = 80;          ///< between them
  double margin_um = 45;       ///< dark rim of the image above, below and beyond closed ends
  Boundary left_end = Boundary::closed, right_end = Boundary::closed;
  double tilt_degrees = 0;
  double bend_um = 0;       ///< sagitta of the axis
  double spacing_um = 150;  ///< between neighbouring nuclei; 0: none
  std::vector<SourceRecipe> sources{SourceRecipe{}};
  SceneWaves waves;
  SceneOptics optics;
  SceneCamera camera;
  double brightness = 420;          ///< mean plateau, counts
  double brightness_spread = 0.12;  ///< relative standard deviation between nuclei
  double import_per_min = 0.09;     ///< mean filling rate constant
  double import_spread = 0.12;
  double radius_um = 15;   ///< of a full-grown nucleus
  double relocate_um = 7;  ///< standard deviation of the step between interphases, each way
  double wander_um_per_min = 0.12;
  int touching = 0;  ///< nuclei given a companion that touches them
  int missing = 0;   ///< nuclei taken out again
  int dying = 0;     ///< nuclei that die in an interphase
  double leak_per_min = 0;
  double permeabilise_min = 0.3;
  double drift_um_per_hour = 0;
  double jump_um = 0;  ///< one step of the stage at two thirds of the film
  double flow_um_per_min = 0;
  double vignetting = 0.12;
  double slope = 0;
  double bleaching_per_min = 0;
  double wall_glow = 25;
  int debris = 0;
  int bubbles = 0;
  double defocus_um = 0;     ///< largest added blur, in a slow swing
  double stamp_jitter = 0;   ///< irregular stamps, share of the interval, below 0.5
  double dropped_share = 0;  ///< share of frames that are missing
};

/// Throws Problem for a recipe outside its ranges.
void check(const SceneRecipe& recipe);

/// Draws a scene: places nuclei by a hard core process, runs the arrival field over them and gives
/// each its interphases. The same recipe gives the same scene. Throws Problem for a recipe outside
/// its ranges.
Scene build_scene(const SceneRecipe& recipe);

}  // namespace wavefount
