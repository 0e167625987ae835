#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include "ome_metadata.h"

namespace wavefount {

/// The name without `.ome.tif`, `.ome.tiff`, `.tif`, `.tiff`, `.btf` or `.companion.ome`, in any
/// case of letters; the whole name where it ends in none.
std::string acquisition_name(const std::string& file_name);

bool is_tiff_name(const std::string& file_name);
bool is_companion_name(const std::string& file_name);

/// The TIFFs of a folder in natural order of their names; hidden files left out.
std::vector<std::filesystem::path> frame_files(const std::filesystem::path& folder);

/// The OME-XML of a TIFF's first page or of a companion file. Throws Problem.
OmeMetadata ome_of(const std::filesystem::path& file);

}  // namespace wavefount
