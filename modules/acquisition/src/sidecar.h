#pragma once

#include <filesystem>
#include <optional>
#include <string>
#include <vector>

#include "wavefount/core/film.h"

namespace wavefount {

/// What a sidecar NAME.yaml says of its film; what it leaves out is empty.
struct Sidecar {
  std::filesystem::path file;  ///< where it lies, or would lie
  bool present = false;
  std::optional<double> pixel_um;
  std::optional<double> interval_min;
  std::vector<double> times_min;
  std::string times_key;             ///< times_min or times_file, where there are stamps
  std::filesystem::path times_file;  ///< where the stamps were read from a file
  std::vector<std::string> channels;
  std::string order;  ///< letters of T, C, Z, fastest first
  std::optional<int> z_planes;
  std::optional<Optics> optics;
  std::optional<int> bit_depth;
  CameraSettings camera;
  FilmOverrides overrides;
  std::vector<std::string> notes;
};

/// Reads the sidecar if it is there. Throws Problem that names the line and what to write instead.
Sidecar read_sidecar(const std::filesystem::path& file);

}  // namespace wavefount
