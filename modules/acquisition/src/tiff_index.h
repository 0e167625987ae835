#pragma once

#include <cstdint>
#include <filesystem>
#include <string>
#include <vector>

#include "tiff_page.h"

namespace wavefount {

/// Where the pages of one TIFF lie, found in one walk along its directories.
struct TiffIndex {
  std::vector<TiffPage> pages;
  std::string description;  ///< ImageDescription of the first page
  std::string broken;       ///< empty, or how the chain of directories ends too soon
};

/// Throws Problem for a file that is empty, no TIFF, or has no page at all. Pages that cannot be
/// used stay in the list and say why.
TiffIndex index_tiff(const std::filesystem::path& file);

/// ImageDescription of the first page; empty when it has none. Throws Problem as index_tiff does.
std::string first_description(const std::filesystem::path& file);

/// Whether the TIFF has at least two pages. Throws Problem as index_tiff does.
bool has_several_pages(const std::filesystem::path& file);

}  // namespace wavefount
