#include "wavefount/synthetic/counter_random.h"
#include "wavefount/synthetic/demo.h"

namespace wavefount {
namespace {

SceneRecipe thin_interior() {
  SceneRecipe r;
  r.name = "thin-interior";
  r.tube_width_um = 100;
  r.spacing_um = 120;
  r.sources = {{0.42, 0.2, 12, 40}};
  return r;
}

SceneRecipe thin_two_origins() {
  SceneRecipe r;
  r.name = "thin-two-origins";
  r.tube_width_um = 100;
  r.spacing_um = 115;
  r.view_um = 2400;
  r.sources = {{0.2, 0, 10, 42}, {0.8, 0, 16, 42}};
  r.waves.speed_um_per_min = 24;
  r.waves.jitter_min = 0.4;
  return r;
}

SceneRecipe thin_end() {
  SceneRecipe r;
  r.name = "thin-end";
  r.tube_width_um = 120;
  r.spacing_um = 120;
  r.frames = 180;
  r.sources = {{0.02, 0, 6, 44}};
  r.waves.speed_um_per_min = 30;
  r.tilt_degrees = 1.5;
  r.drift_um_per_hour = 6;
  return r;
}

SceneRecipe medium_wall() {
  SceneRecipe r;
  r.name = "medium-wall";
  r.tube_width_um = 350;
  r.spacing_um = 110;
  r.view_um = 1500;
  r.sources = {{0.55, -0.86, 10, 40}};
  r.waves.speed_um_per_min = 26;
  r.waves.jitter_min = 0.35;
  r.wall_glow = 60;
  r.defocus_um = 1.2;
  return r;
}

SceneRecipe medium_two_ends() {
  SceneRecipe r;
  r.name = "medium-two-ends";
  r.tube_width_um = 200;
  r.spacing_um = 125;
  r.sources = {{0.02, 0.1, 8, 43}, {0.98, -0.2, 12, 43}};
  r.waves.speed_um_per_min = 28;
  r.bleaching_per_min = 0.0008;
  r.vignetting = 0.25;
  return r;
}

SceneRecipe wide_interior() {
  SceneRecipe r;
  r.name = "wide-interior";
  r.tube_width_um = 560;
  r.spacing_um = 140;
  r.view_um = 1600;
  r.sources = {{0.6, 0.1, 9, 41}};
  r.waves.speed_um_per_min = 30;
  r.debris = 8;
  r.bubbles = 1;
  r.missing = 2;
  return r;
}

SceneRecipe open_end() {
  SceneRecipe r;
  r.name = "open-end";
  r.tube_width_um = 150;
  r.spacing_um = 120;
  r.left_end = Boundary::open;
  r.right_end = Boundary::open;
  r.sources = {{-0.12, 0, 2, 40}};
  r.waves.speed_um_per_min = 32;
  return r;
}

SceneRecipe empty_tube() {
  SceneRecipe r;
  r.name = "empty";
  r.tube_width_um = 200;
  r.spacing_um = 0;
  r.debris = 6;
  r.view_um = 1500;
  r.sources = {};
  r.frames = 120;
  r.drift_um_per_hour = 4;
  return r;
}

SceneRecipe together() {
  SceneRecipe r;
  r.name = "together";
  r.tube_width_um = 200;
  r.spacing_um = 130;
  r.view_um = 1500;
  r.sources = {{0.5, 0, 22, 40}};
  r.waves.together = true;
  r.waves.jitter_min = 0.02;
  return r;
}

SceneRecipe bent() {
  SceneRecipe r;
  r.name = "bent";
  r.tube_width_um = 140;
  r.spacing_um = 120;
  r.bend_um = 180;
  r.sources = {{0.7, 0, 10, 40}};
  r.waves.speed_um_per_min = 25;
  r.relocate_um = 9;
  r.jump_um = 6;
  return r;
}

SceneRecipe noisy() {
  SceneRecipe r;
  r.name = "noisy";
  r.tube_width_um = 160;
  r.spacing_um = 130;
  r.sources = {{0.3, 0, 10, 40}};
  r.brightness = 120;
  r.optics.cytoplasm = 90;
  r.camera.gain_electrons_per_count = 0.35;
  r.camera.read_noise_electrons = 2.5;
  r.camera.bit_depth = 12;
  r.debris = 5;
  r.flow_um_per_min = 0.2;
  r.stamp_jitter = 0.2;
  r.dropped_share = 0.02;
  return r;
}

SceneRecipe side_by_side() {
  SceneRecipe r;
  r.name = "side-by-side";
  r.tube_width_um = 110;
  r.spacing_um = 120;
  r.tubes = 2;
  r.view_um = 1700;
  r.sources = {{0.35, 0, 8, 42}};
  r.touching = 2;
  r.dying = 1;
  return r;
}

SceneRecipe arrest() {
  SceneRecipe r;
  r.name = "arrest";
  r.tube_width_um = 150;
  r.spacing_um = 120;
  r.view_um = 1200;
  r.sources = {{0.4, 0, 12, 42}};
  r.waves.arrest = true;
  r.waves.arrest_cycle = 2;
  return r;
}

}  // namespace

std::vector<SceneRecipe> demo_scenarios(std::uint64_t seed) {
  std::vector<SceneRecipe> recipes = {thin_interior(),   medium_wall(),      open_end(),
                                      empty_tube(),      together(),         bent(),
                                      noisy(),           thin_two_origins(), thin_end(),
                                      medium_two_ends(), wide_interior(),    side_by_side(),
                                      arrest()};
  std::uint64_t number = 0;
  for (auto& recipe : recipes) recipe.seed = CounterRandom(seed, 5).bits(number++);
  return recipes;
}

}  // namespace wavefount
