#include "wavefount/synthetic/scene_recipe.h"

#include <cmath>

#include "lay_nuclei.h"
#include "lay_tubes.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

void require(bool held, const SceneRecipe& recipe, const std::string& what) {
  if (!held) throw Problem("scene " + recipe.name + " cannot be built: " + what + ".");
}

}  // namespace

void check(const SceneRecipe& r) {
  require(r.frames >= 1 && r.frames <= 20000, r, "the number of frames must be 1 to 20000");
  require(r.interval_min >= 0.05 && r.interval_min <= 10, r,
          "the frame interval must be 0.05 to 10 minutes");
  require(r.pixel_um >= 0.2 && r.pixel_um <= 5, r, "the pixel size must be 0.2 to 5 um");
  require(r.view_um >= 200 && r.view_um <= 20000, r, "the view must be 200 to 20000 um long");
  require(r.tube_width_um >= 60 && r.tube_width_um <= 1000, r,
          "the tube must be 60 to 1000 um wide");
  require(r.view_um / r.pixel_um <= 20000, r, "the image would be wider than 20000 pixels");
  require(r.tubes >= 1 && r.tubes <= 8, r, "the number of tubes must be 1 to 8");
  require(r.spacing_um == 0 || r.spacing_um >= 40, r, "nuclei must be at least 40 um apart");
  require(
      r.stamp_jitter >= 0 && r.stamp_jitter < 0.5 && r.dropped_share >= 0 && r.dropped_share < 0.5,
      r, "irregular stamps and dropped frames must stay below half");
}

namespace {

std::vector<double> stamps(const SceneRecipe& recipe, RandomSequence& random) {
  std::vector<double> times;
  for (int slot = 0; static_cast<int>(times.size()) < recipe.frames; ++slot) {
    const double jitter = recipe.stamp_jitter * (random.uniform() - 0.5);
    const bool dropped = random.uniform() < recipe.dropped_share;
    if (slot == 0 || !dropped)
      times.push_back((slot + (slot == 0 ? 0 : jitter)) * recipe.interval_min);
  }
  return times;
}

void lay_sources(const SceneRecipe& recipe, Scene& scene) {
  for (std::size_t t = 0; t < scene.tubes.size(); ++t)
    for (const auto& from : recipe.sources) {
      const auto& tube = scene.tubes[t];
      SceneSource source;
      source.tube = static_cast<int>(t);
      source.along_um = from.along * tube.length_um;
      source.across_um = from.across * tube.width_um / 2;
      // Tubes side by side are not in step.
      source.first_min = from.first_min + 7.0 * static_cast<double>(t);
      source.period_min = from.period_min;
      source.in_view = from.along >= 0 && from.along <= 1;
      scene.sources.push_back(source);
    }
}

void lay_spots(const SceneRecipe& recipe, RandomSequence& random, Scene& scene) {
  const auto& tube = scene.tubes.front();
  for (int i = 0; i < recipe.debris; ++i) {
    const double along = random.uniform(0.03, 0.97) * tube.length_um;
    const double across = random.uniform(-0.5, 0.5) * tube.width_um;
    scene.nuisances.debris.push_back({point_at(tube, along, across), random.uniform(1.5, 5),
                                      recipe.brightness * random.uniform(0.4, 2)});
  }
  for (int i = 0; i < recipe.bubbles; ++i) {
    const double along = random.uniform(0.2, 0.8) * tube.length_um;
    const double radius = 0.14 * tube.width_um;
    const double across = (i % 2 == 0 ? 1 : -1) * (tube.width_um / 2 - radius);
    scene.nuisances.bubbles.push_back({point_at(tube, along, across), radius, 60});
  }
}

/// Slow wander of the stage in two directions with one jump.
void lay_drift(const SceneRecipe& recipe, RandomSequence& random, Scene& scene) {
  if (recipe.drift_um_per_hour == 0 && recipe.jump_um == 0) return;
  const double turn = random.uniform(0, 2 * M_PI);
  const double phase = random.uniform(0, 2 * M_PI);
  const auto jump_frame = 2 * scene.times_min.size() / 3;
  for (std::size_t i = 0; i < scene.times_min.size(); ++i) {
    const double hours = scene.times_min[i] / 60;
    const double far = recipe.drift_um_per_hour * hours;
    const double sway =
        0.1 * recipe.drift_um_per_hour * (std::sin(4 * hours + phase) - std::sin(phase));
    const double jump = i >= jump_frame ? recipe.jump_um : 0;
    scene.nuisances.drift_um.push_back(
        {far * std::cos(turn) + sway + jump * std::sin(turn), far * std::sin(turn) + 0.6 * jump});
  }
}

void lay_focus(const SceneRecipe& recipe, RandomSequence& random, Scene& scene) {
  if (recipe.defocus_um <= 0) return;
  const double phase = random.uniform(0, 2 * M_PI);
  for (const double time : scene.times_min) {
    const double swing = std::sin(time / 17 + phase);
    scene.nuisances.defocus_um.push_back(recipe.defocus_um * swing * swing);
  }
}

/// A source in view is a nucleus: the one nearest to where the recipe wants it.
void settle_on_nucleus(const Scene& scene, SceneSource& source) {
  if (!source.in_view) return;
  const Point wanted{source.along_um, source.across_um};
  double nearest = 1e9;
  for (const auto& nucleus : scene.nuclei) {
    const double distance = std::hypot(nucleus.along_um - wanted.x, nucleus.across_um - wanted.y);
    if (nucleus.tube != source.tube || distance >= nearest) continue;
    nearest = distance;
    source.along_um = nucleus.along_um;
    source.across_um = nucleus.across_um;
  }
}

}  // namespace

Scene build_scene(const SceneRecipe& recipe) {
  check(recipe);
  RandomSequence random(recipe.seed, 3);
  Scene scene;
  scene.name = recipe.name;
  scene.seed = recipe.seed;
  scene.pixel_um = recipe.pixel_um;
  scene.waves = recipe.waves;
  scene.optics = recipe.optics;
  scene.camera = recipe.camera;
  scene.times_min = stamps(recipe, random);
  lay_tubes(recipe, scene);
  lay_sources(recipe, scene);
  lay_spots(recipe, random, scene);
  lay_drift(recipe, random, scene);
  lay_focus(recipe, random, scene);
  scene.nuisances.vignetting = recipe.vignetting;
  scene.nuisances.slope = recipe.slope;
  scene.nuisances.bleaching_per_min = recipe.bleaching_per_min;
  scene.nuisances.wall_glow = recipe.wall_glow;
  lay_nuclei(recipe, random, scene);
  for (auto& source : scene.sources) settle_on_nucleus(scene, source);
  schedule_lives(recipe, random, scene);
  return scene;
}

}  // namespace wavefount
