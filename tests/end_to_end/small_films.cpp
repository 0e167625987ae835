#include "small_films.h"

#include <fstream>

#include "wavefount/acquisition/tiff_writer.h"
#include "wavefount/synthetic/film_files.h"
#include "wavefount/synthetic/scene_recipe.h"

namespace wavefount {

void write_small_film(const std::filesystem::path& folder, const std::string& name, int frames) {
  SceneRecipe recipe;
  recipe.name = name;
  recipe.view_um = 600;
  recipe.frames = frames;
  recipe.spacing_um = 120;
  recipe.tube_width_um = 120;
  write_film(build_scene(recipe), folder,
             {FilmFormat::tiff_with_sidecar, TiffCompression::deflate, 1});
}

void write_flat_film(const std::filesystem::path& folder, const std::string& name, int frames,
                     unsigned value) {
  constexpr int width = 160;
  constexpr int height = 100;
  const std::vector<std::uint16_t> pixels(width * height, static_cast<std::uint16_t>(value));
  TiffWriter writer(folder / (name + ".tif"), {});
  for (int frame = 0; frame < frames; ++frame) writer.write(pixels.data(), width, height);
  writer.commit();
  write_sidecar(folder, name);
}

void write_sidecar(const std::filesystem::path& folder, const std::string& name,
                   const std::string& text) {
  std::ofstream(folder / (name + ".yaml")) << text;
}

}  // namespace wavefount
