#pragma once

#include <filesystem>
#include <string>
#include <vector>

namespace wavefount {

/// A film of a short tube, large enough to hold nuclei, small enough to measure in a second or two.
/// Written into `folder` as `NAME.tif` with a sidecar.
void write_small_film(const std::filesystem::path& folder, const std::string& name,
                      int frames = 24);

/// Pages of one constant value, with a sidecar.
void write_flat_film(const std::filesystem::path& folder, const std::string& name, int frames,
                     unsigned value);

/// A sidecar for `NAME.tif`.
void write_sidecar(const std::filesystem::path& folder, const std::string& name,
                   const std::string& text = "pixel_size_um: 1.3\nframe_interval_min: 1\n");

}  // namespace wavefount
