#pragma once

#include "wavefount/synthetic/scene_recipe.h"

namespace wavefount {

/// Sizes the image and lays the recipe's tubes into it.
void lay_tubes(const SceneRecipe& recipe, Scene& scene);

}  // namespace wavefount
