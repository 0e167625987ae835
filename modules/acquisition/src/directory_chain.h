#pragma once

#include <cstddef>
#include <cstdint>
#include <filesystem>
#include <string>
#include <vector>

namespace wavefount {

/// The bytes at which a TIFF's directories start, in the order of the chain.
struct DirectoryChain {
  std::vector<std::uint64_t> directories;
  std::string broken;  ///< empty when the chain ends as it should; else what broke it
  std::uint64_t file_bytes = 0;
};

/// Walks the chain by its links alone, at most `most` directories far (TIFF 6.0 section 2; BigTIFF
/// has the same with wider fields). libtiff stops without a word at a loop or a cut; here it is
/// told apart. Throws Problem when the file is empty or no TIFF.
DirectoryChain walk_directories(const std::filesystem::path& file, std::size_t most);

}  // namespace wavefount
