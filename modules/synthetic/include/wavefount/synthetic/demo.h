#pragma once

#include <cstdint>
#include <filesystem>
#include <functional>
#include <optional>
#include <string>
#include <vector>

#include "wavefount/acquisition/tiff_writer.h"
#include "wavefount/synthetic/scene_recipe.h"

namespace wavefount {

/// How a film is laid on disk.
enum class FilmFormat { ome_tiff, tiff_with_sidecar, frame_folder };

/// What `wavefount demo` may be told. An empty value leaves what the scenario says.
struct DemoOptions {
  int count = 0;  ///< acquisitions; 0: each scenario once; 1 to 10000
  std::uint64_t seed = 1;
  std::optional<double> tube_width_um;  ///< 60 to 1000
  std::optional<int> frames;            ///< 1 to 20000
  std::optional<double> interval_min;   ///< 0.05 to 10
  std::optional<double> pixel_um;       ///< 0.2 to 5
  std::optional<double> view_um;        ///< length of the image, 200 to 20000
  double noise = 1;                     ///< factor on the relative noise of the light, 0.05 to 20
  std::optional<FilmFormat> format;
  TiffCompression compression = TiffCompression::deflate;
  bool labels = false;                          ///< also the true outlines, truth/NAME/labels.tif
  int threads = 2;                              ///< 1 to 256; changes no byte
  std::vector<std::string> only;                ///< names of scenarios; empty: all
  std::function<void(const std::string&)> say;  ///< a line of progress; may be empty
};

/// The scenarios in the order of the demo, drawn for one seed. Seeds give other nuclei, jitter and
/// noise, never another kind of scene.
std::vector<SceneRecipe> demo_scenarios(std::uint64_t seed);

/// Recipes of the demo as the options ask for them.
std::vector<SceneRecipe> demo_recipes(const DemoOptions& options);

/// Writes DIR/films (acquisitions and `acquisitions.csv`) and DIR/truth. Throws Problem for options
/// outside their ranges, a folder that is not empty, or a full disk.
void write_demo(const std::filesystem::path& folder, const DemoOptions& options);

}  // namespace wavefount
