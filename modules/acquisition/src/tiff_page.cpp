#include "tiff_page.h"

#include <algorithm>
#include <array>

namespace wavefount {
namespace {

/// The largest scientific cameras have some 150 megapixels; a damaged size that asks for more is
/// refused before memory is taken.
constexpr std::uint64_t most_pixels = std::uint64_t{1} << 28U;
constexpr std::uint32_t longest_side = std::uint32_t{1} << 17U;
constexpr std::uint64_t largest_piece = std::uint64_t{1} << 29U;

template <class Value>
Value tag(TIFF* tiff, std::uint32_t name, Value otherwise) {
  Value value{};
  return TIFFGetFieldDefaulted(tiff, name, &value) == 1 ? value : otherwise;
}

SampleKind sample_kind(std::uint16_t format) {
  if (format == SAMPLEFORMAT_IEEEFP) return SampleKind::real;
  return format == SAMPLEFORMAT_INT ? SampleKind::signed_integer : SampleKind::unsigned_integer;
}

std::string size_problem(std::uint32_t width, std::uint32_t height) {
  if (width == 0 || height == 0) return "has no pixels";
  if (width > longest_side || height > longest_side ||
      std::uint64_t{width} * height > most_pixels) {
    return "claims the absurd size of " + std::to_string(width) + " × " + std::to_string(height) +
           " pixels";
  }
  return {};
}

std::string compression_problem(int compression) {
  constexpr std::array<int, 6> readable = {COMPRESSION_NONE,    COMPRESSION_LZW,
                                           COMPRESSION_DEFLATE, COMPRESSION_ADOBE_DEFLATE,
                                           COMPRESSION_ZSTD,    COMPRESSION_PACKBITS};
  if (std::find(readable.begin(), readable.end(), compression) != readable.end() &&
      TIFFIsCODECConfigured(static_cast<std::uint16_t>(compression)) != 0) {
    return {};
  }
  return "is compressed in a way that is not read (TIFF number " + std::to_string(compression) +
         "); save it uncompressed or with LZW, Deflate or ZSTD";
}

std::string sample_problem(const TiffPage& page, std::uint16_t format) {
  const bool known_format = format == SAMPLEFORMAT_UINT || format == SAMPLEFORMAT_INT ||
                            format == SAMPLEFORMAT_IEEEFP || format == SAMPLEFORMAT_VOID;
  const bool real = page.kind == SampleKind::real && page.bits == 32;
  const bool integer = page.kind != SampleKind::real &&
                       (page.bits == 8 || page.bits == 16 || page.bits == 32 ||
                        (page.bits == 12 && page.kind == SampleKind::unsigned_integer));
  if (known_format && (real || integer)) return {};
  return "has samples of " + std::to_string(page.bits) +
         " bits in a form that is not read; save it as 8, 12, 16 or 32 bit integers or 32 bit "
         "float";
}

std::string colour_problem(TIFF* tiff) {
  const auto samples = tag<std::uint16_t>(tiff, TIFFTAG_SAMPLESPERPIXEL, 1);
  std::uint16_t photometric = PHOTOMETRIC_MINISBLACK;
  TIFFGetField(tiff, TIFFTAG_PHOTOMETRIC, &photometric);
  const bool grey = photometric == PHOTOMETRIC_MINISBLACK ||
                    photometric == PHOTOMETRIC_MINISWHITE || photometric == PHOTOMETRIC_PALETTE;
  if (samples == 1 && grey) return {};
  return "is a colour image (" + std::to_string(samples) +
         " samples a pixel); save each imaging channel as a page of its own in grey";
}

std::string piece_problem(TIFF* tiff, const TiffPage& page) {
  const std::uint64_t bytes = page.tiled ? TIFFTileSize64(tiff) : TIFFStripSize64(tiff);
  if (bytes > 0 && bytes <= largest_piece) return {};
  return std::string("claims an absurd size of its ") + (page.tiled ? "tiles" : "strips");
}

}  // namespace

std::uint64_t row_bytes(const TiffPage& page) {
  return (static_cast<std::uint64_t>(page.width) * static_cast<std::uint64_t>(page.bits) + 7) / 8;
}

TiffPage describe_page(TIFF* tiff) {
  TiffPage page;
  const auto width = tag<std::uint32_t>(tiff, TIFFTAG_IMAGEWIDTH, 0);
  const auto height = tag<std::uint32_t>(tiff, TIFFTAG_IMAGELENGTH, 0);
  page.problem = size_problem(width, height);
  if (!page.problem.empty()) return page;
  page.width = static_cast<int>(width);
  page.height = static_cast<int>(height);
  page.bits = tag<std::uint16_t>(tiff, TIFFTAG_BITSPERSAMPLE, 1);
  const auto format = tag<std::uint16_t>(tiff, TIFFTAG_SAMPLEFORMAT, SAMPLEFORMAT_UINT);
  page.kind = sample_kind(format);
  page.compression = tag<std::uint16_t>(tiff, TIFFTAG_COMPRESSION, COMPRESSION_NONE);
  page.tiled = TIFFIsTiled(tiff) != 0;
  page.inverted = tag<std::uint16_t>(tiff, TIFFTAG_PHOTOMETRIC, PHOTOMETRIC_MINISBLACK) ==
                  PHOTOMETRIC_MINISWHITE;
  page.reduced = (tag<std::uint32_t>(tiff, TIFFTAG_SUBFILETYPE, 0) & FILETYPE_REDUCEDIMAGE) != 0;
  page.problem = colour_problem(tiff);
  if (page.problem.empty()) page.problem = sample_problem(page, format);
  if (page.problem.empty()) page.problem = compression_problem(page.compression);
  if (page.problem.empty()) page.problem = piece_problem(tiff, page);
  return page;
}

bool pixels_inside(TIFF* tiff, const TiffPage& page, std::uint64_t file_bytes) {
  const std::uint32_t pieces = page.tiled ? TIFFNumberOfTiles(tiff) : TIFFNumberOfStrips(tiff);
  if (pieces == 0) return false;
  const auto rows_per_strip = tag<std::uint32_t>(tiff, TIFFTAG_ROWSPERSTRIP, 0);
  const auto height = static_cast<std::uint64_t>(page.height);
  const bool plain_strips = page.compression == COMPRESSION_NONE && !page.tiled;
  for (std::uint32_t i = 0; i < pieces; ++i) {
    const std::uint64_t offset = TIFFGetStrileOffset(tiff, i);
    std::uint64_t bytes = TIFFGetStrileByteCount(tiff, i);
    if (plain_strips) {
      const std::uint64_t first = std::min(height, std::uint64_t{i} * rows_per_strip);
      bytes = std::min<std::uint64_t>(rows_per_strip, height - first) * row_bytes(page);
    }
    if (offset == 0 || bytes == 0 || offset > file_bytes || bytes > file_bytes - offset) {
      return false;
    }
  }
  return true;
}

}  // namespace wavefount
