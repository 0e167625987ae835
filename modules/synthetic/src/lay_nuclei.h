#pragma once

#include "wavefount/synthetic/counter_random.h"
#include "wavefount/synthetic/scene_recipe.h"

namespace wavefount {

/// Places nuclei in the scene's tubes by a hard core process, and gives each its looks.
void lay_nuclei(const SceneRecipe& recipe, RandomSequence& random, Scene& scene);

/// Mitosis number `cycle` sweeps a tube: when it reaches a place without the nuclei's own jitter.
/// `source` receives the index of the source that it comes from.
double arrival_min(const Scene& scene, int tube, double along_um, double across_um, int cycle,
                   int* source = nullptr);

/// Gives every nucleus its interphases, as far as they touch the film.
void schedule_lives(const SceneRecipe& recipe, RandomSequence& random, Scene& scene);

}  // namespace wavefount
