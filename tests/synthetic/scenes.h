#pragma once

#include "wavefount/synthetic/scene_recipe.h"

namespace wavefount {

/// A small film for tests: a thin tube, one wave from the inside after another.
inline SceneRecipe small_recipe() {
  SceneRecipe recipe;
  recipe.name = "small";
  recipe.seed = 42;
  recipe.view_um = 900;
  recipe.tube_width_um = 120;
  recipe.frames = 120;
  recipe.spacing_um = 110;
  recipe.sources = {{0.5, 0, 12, 40}};
  return recipe;
}

/// One nucleus alone in a wide field that enters mitosis at 10 min; no nuisances, no background.
inline Scene lone_nucleus() {
  SceneRecipe recipe;
  recipe.view_um = 900;
  recipe.tube_width_um = 800;
  recipe.frames = 40;
  recipe.interval_min = 0.5;
  recipe.spacing_um = 0;
  recipe.vignetting = 0;
  recipe.wall_glow = 0;
  recipe.optics.mottle = 0;
  recipe.optics.dome = 0;
  recipe.optics.roundness = 0;
  recipe.permeabilise_min = 1e-4;
  Scene scene = build_scene(recipe);
  SceneNucleus nucleus;
  nucleus.along_um = scene.tubes[0].length_um / 2;
  SceneLife life;
  life.cycle = 1;
  life.formed_min = -30;
  life.entry_min = 10;
  life.place_um = point_at(scene.tubes[0], nucleus.along_um, 0);
  life.plateau = 500;
  life.import_per_min = 0.1;
  life.first_radius_um = 5;
  life.last_radius_um = 15;
  life.growth_per_min = 0.5;
  life.permeabilise_min = 1e-4;
  nucleus.lives = {life};
  scene.nuclei = {nucleus};
  return scene;
}

}  // namespace wavefount
