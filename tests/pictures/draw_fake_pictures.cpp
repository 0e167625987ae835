#include <chrono>
#include <exception>
#include <filesystem>
#include <iostream>

#include "fake_records.h"
#include "wavefount/pictures/pictures.h"

namespace {

using namespace wavefount;

void draw(const std::filesystem::path& folder, const fake::Scene& scene) {
  const auto output = folder / scene.name;
  std::filesystem::create_directories(output);
  const auto records = fake::records_of(scene, output / "reduced");
  const auto start = std::chrono::steady_clock::now();
  draw_kymograph(records, scene.name).write_png(output / "kymograph.png");
  draw_map(records, scene.name).write_png(output / "map.png");
  draw_montage(records, scene.name).write_png(output / "montage.png");
  draw_curves(records, scene.name).write_png(output / "curves.png");
  const std::chrono::duration<double> took = std::chrono::steady_clock::now() - start;
  std::cout << scene.name << ": " << took.count() << " s\n";
}

}  // namespace

/// Draws the pictures of made-up acquisitions into the folder given, to be looked at.
int main(int count, char** arguments) {
  if (count != 2) {
    std::cerr << "usage: draw_fake_pictures FOLDER\n";
    return 2;
  }
  try {
    fake::Scene thin;
    thin.name = "thin tube";
    fake::Scene upright = thin;
    upright.name = "upright";
    upright.upright = true;
    fake::Scene large = thin;
    large.name = "large";
    large.frames = 200;
    large.waves = 7;
    large.length_um = 3000;
    large.width_um = 560;
    large.spacing_um = 75;
    large.drift_px = 20;
    for (const auto& scene : {thin, upright, large}) draw(arguments[1], scene);
  } catch (const std::exception& problem) {
    std::cerr << problem.what() << '\n';
    return 1;
  }
  return 0;
}
