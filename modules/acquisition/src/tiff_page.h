#pragma once

#include <tiffio.h>

#include <cstdint>
#include <string>

namespace wavefount {

enum class SampleKind { unsigned_integer, signed_integer, real };

/// How one page of a TIFF stores its pixels.
struct TiffPage {
  std::uint64_t directory = 0;  ///< byte at which the page's directory starts
  int width = 0;
  int height = 0;
  int bits = 0;  ///< a sample
  SampleKind kind = SampleKind::unsigned_integer;
  int compression = COMPRESSION_NONE;
  bool tiled = false;
  bool inverted = false;  ///< MinIsWhite
  bool reduced = false;   ///< a smaller copy of another page
  std::string problem;    ///< empty, or why the page cannot be used: the end of a sentence
};

/// Reads the tags of the directory that is current in `tiff`; TiffPage::problem says what the
/// reader cannot do with them.
TiffPage describe_page(TIFF* tiff);

/// Whether all strips or tiles of the current directory lie inside a file of `file_bytes`.
bool pixels_inside(TIFF* tiff, const TiffPage& page, std::uint64_t file_bytes);

/// Bytes of one row of pixels in an uncompressed strip.
std::uint64_t row_bytes(const TiffPage& page);

}  // namespace wavefount
