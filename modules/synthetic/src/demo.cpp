#include "wavefount/synthetic/demo.h"

#include <algorithm>
#include <array>
#include <cmath>

#include "wavefount/core/problem.h"
#include "wavefount/synthetic/film_files.h"
#include "wavefount/synthetic/truth.h"
#include "wavefount/tables/csv_writer.h"

namespace wavefount {
namespace {

void require(bool held, const std::string& sentence) {
  if (!held) throw Problem("demo: " + sentence + ".");
}

void check(const DemoOptions& options) {
  require(options.count >= 0 && options.count <= 10000, "the count must be 1 to 10000");
  require(options.noise >= 0.05 && options.noise <= 20, "noise must be 0.05 to 20");
  require(options.threads >= 1 && options.threads <= 256, "threads must be 1 to 256");
}

/// Noise relative to light: `factor` times as much of it means fewer electrons a count.
void scale_noise(SceneCamera& camera, double factor) {
  camera.gain_electrons_per_count /= factor * factor;
  camera.read_noise_electrons /= factor;
}

void apply(const DemoOptions& options, SceneRecipe& recipe) {
  if (options.tube_width_um) recipe.tube_width_um = *options.tube_width_um;
  if (options.frames) recipe.frames = *options.frames;
  if (options.interval_min) recipe.interval_min = *options.interval_min;
  if (options.pixel_um) recipe.pixel_um = *options.pixel_um;
  if (options.view_um) recipe.view_um = *options.view_um;
  scale_noise(recipe.camera, options.noise);
}

std::vector<SceneRecipe> chosen_scenarios(const DemoOptions& options, std::uint64_t seed) {
  auto recipes = demo_scenarios(seed);
  for (const auto& name : options.only)
    require(std::any_of(recipes.begin(), recipes.end(),
                        [&](const SceneRecipe& recipe) { return recipe.name == name; }),
            "there is no scenario " + name);
  if (!options.only.empty())
    std::erase_if(recipes, [&](const SceneRecipe& recipe) {
      return std::find(options.only.begin(), options.only.end(), recipe.name) == options.only.end();
    });
  return recipes;
}

FilmFormat format_of(const DemoOptions& options, std::size_t index) {
  if (options.format) return *options.format;
  constexpr std::array<FilmFormat, 4> turn = {FilmFormat::ome_tiff, FilmFormat::tiff_with_sidecar,
                                              FilmFormat::ome_tiff, FilmFormat::frame_folder};
  return turn[index % turn.size()];
}

void write_sheet(const std::vector<SceneRecipe>& recipes, const std::filesystem::path& file) {
  std::vector<Column> columns;
  for (const char* name : {"acquisition", "tube_width_um", "batch", "condition", "replicate",
                           "temperature_c", "exposure_ms"})
    columns.push_back({name, name, ColumnKind::text, 0, ""});
  CsvWriter writer(file);
  writer.header(columns);
  constexpr std::size_t batches = 4;
  for (std::size_t i = 0; i < recipes.size(); ++i)
    writer.row({recipes[i].name, recipes[i].tube_width_um,
                "batch-" + std::to_string(1 + i % batches),
                std::string(recipes[i].spacing_um > 0 ? "nuclei" : "cytoplasm only"),
                static_cast<std::int64_t>(1 + i / batches), std::int64_t{20}, std::int64_t{80}});
  writer.commit();
}

void refuse_used(const std::filesystem::path& folder) {
  std::error_code error;
  if (std::filesystem::exists(folder, error) && !std::filesystem::is_empty(folder, error))
    throw Problem("the folder " + folder.string() +
                  " is not empty; name a new one, so that nothing in it is overwritten.");
}

}  // namespace

std::vector<SceneRecipe> demo_recipes(const DemoOptions& options) {
  check(options);
  const auto first = chosen_scenarios(options, options.seed);
  const auto count = options.count == 0 ? first.size() : static_cast<std::size_t>(options.count);
  std::vector<SceneRecipe> recipes;
  for (std::size_t i = 0; i < count; ++i) {
    const auto round = i / first.size();
    auto recipe = round == 0
                      ? first[i]
                      : chosen_scenarios(options, options.seed + 7919 * round)[i % first.size()];
    if (round > 0) recipe.name.append("-").append(std::to_string(round + 1));
    apply(options, recipe);
    check(recipe);
    recipes.push_back(recipe);
  }
  return recipes;
}

void write_demo(const std::filesystem::path& folder, const DemoOptions& options) {
  const auto recipes = demo_recipes(options);
  refuse_used(folder);
  const auto films = folder / "films";
  std::filesystem::create_directories(films);
  for (std::size_t i = 0; i < recipes.size(); ++i) {
    const auto scene = build_scene(recipes[i]);
    if (options.say)
      options.say(scene.name + ": " + std::to_string(scene.frames()) + " frames of " +
                  std::to_string(scene.width) + " x " + std::to_string(scene.height) + ", " +
                  std::to_string(scene.nuclei.size()) + " nuclei");
    write_film(scene, films, {format_of(options, i), options.compression, options.threads});
    write_truth(scene, folder / "truth");
    if (options.labels) write_truth_labels(scene, folder / "truth");
  }
  write_sheet(recipes, films / "acquisitions.csv");
}

}  // namespace wavefount
