#pragma once

#include <filesystem>

namespace wavefount {

/// Writes pixels of 32 bits (native 0x00rrggbb), `stride` bytes a row, as PNG at a low compression
/// level, which takes a fifth of the time of the usual one. Throws Problem when the file cannot be
/// written.
void write_png_file(const std::filesystem::path& file, const unsigned char* pixels, int width,
                    int height, int stride);

}  // namespace wavefount
