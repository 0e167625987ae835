#pragma once

#include <filesystem>

#include "wavefount/synthetic/demo.h"
#include "wavefount/synthetic/scene.h"

namespace wavefount {

struct FilmFiles {
  FilmFormat format = FilmFormat::ome_tiff;
  TiffCompression compression = TiffCompression::deflate;
  int threads = 2;
};

/// Renders a scene and writes it into a folder as NAME.ome.tif, or as NAME.tif or NAME/ with the
/// sidecar NAME.yaml. Bytes do not depend on the number of threads. Throws Problem.
void write_film(const Scene& scene, const std::filesystem::path& folder, const FilmFiles& files);

}  // namespace wavefount
