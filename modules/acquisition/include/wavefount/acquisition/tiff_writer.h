#pragma once

#include <cstdint>
#include <filesystem>
#include <memory>
#include <string>

namespace wavefount {

enum class PixelFormat { unsigned8, packed12, unsigned16, unsigned32, float32 };
enum class TiffCompression { none, lzw, deflate, zstd };

/// How the pages of a TIFF are laid out.
struct TiffLayout {
  PixelFormat format = PixelFormat::unsigned16;
  TiffCompression compression = TiffCompression::none;
  bool predictor = false;  ///< horizontal differencing before LZW, Deflate or ZSTD (integers)
  int level = 0;           ///< of Deflate (1 to 9) or ZSTD (1 to 22); 0: the library's choice
  int tile_px = 0;         ///< side of square tiles, a multiple of 16; 0: strips
  int rows_per_strip = 0;  ///< 0: strips of about 64 KiB
  bool big_tiff = false;   ///< needed from 4 GiB on
  bool big_endian = false;
  std::string description;  ///< ImageDescription of the first page, UTF-8
};

/// Writes a TIFF page by page beside its final name; only commit() gives it that name, so that a
/// file cut short by a crash is never taken for a whole one. Not thread-safe.
class TiffWriter {
 public:
  /// Throws Problem when the file cannot be made or the layout is not possible.
  TiffWriter(const std::filesystem::path& file, const TiffLayout& layout);
  /// Removes what was written unless it was committed.
  ~TiffWriter();
  TiffWriter(const TiffWriter&) = delete;
  TiffWriter& operator=(const TiffWriter&) = delete;

  /// Appends a page of width × height pixels, row by row from the top left. The pixel type must be
  /// the layout's (packed12 takes 16-bit values of at most 4095). Throws Problem (disk full, …).
  void write(const std::uint8_t* pixels, int width, int height);
  void write(const std::uint16_t* pixels, int width, int height);
  void write(const std::uint32_t* pixels, int width, int height);
  void write(const float* pixels, int width, int height);

  int pages() const;
  /// Flushes to disk and renames to the final name. Throws Problem.
  void commit();

 private:
  class Pages;
  std::unique_ptr<Pages> pages_;
};

}  // namespace wavefount
