#pragma once

#include <filesystem>
#include <string>

namespace wavefount {

/// XXH3-128 of the file's bytes in 32 hexadecimal digits (canonical, big-endian order), read in
/// blocks of 1 MiB. Throws Problem when the file cannot be read.
std::string checksum(const std::filesystem::path& file);

}  // namespace wavefount
