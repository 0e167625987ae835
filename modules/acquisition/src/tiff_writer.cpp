#include "wavefount/acquisition/tiff_writer.h"

#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <vector>

#include "tiff_handle.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

int bits_per_sample(PixelFormat format) {
  switch (format) {
    case PixelFormat::unsigned8:
      return 8;
    case PixelFormat::packed12:
      return 12;
    case PixelFormat::unsigned16:
      return 16;
    case PixelFormat::unsigned32:
    case PixelFormat::float32:
      return 32;
  }
  return 16;
}

int compression_tag(TiffCompression compression) {
  switch (compression) {
    case TiffCompression::none:
      return COMPRESSION_NONE;
    case TiffCompression::lzw:
      return COMPRESSION_LZW;
    case TiffCompression::deflate:
      return COMPRESSION_ADOBE_DEFLATE;
    case TiffCompression::zstd:
      return COMPRESSION_ZSTD;
  }
  return COMPRESSION_NONE;
}

std::string open_mode(const TiffLayout& layout) {
  std::string mode = "w";
  mode += layout.big_tiff ? "8" : "4";
  mode += layout.big_endian ? "b" : "l";
  return mode;
}

std::size_t row_bytes(int width, PixelFormat format) {
  return (static_cast<std::size_t>(width) * static_cast<std::size_t>(bits_per_sample(format)) + 7) /
         8;
}

/// Two 12-bit values to three bytes, highest bits first; a row starts on a byte.
void pack12(const std::uint16_t* values, int count, unsigned char* packed) {
  for (int i = 0; i < count; i += 2) {
    const unsigned first = values[i];
    const unsigned second = i + 1 < count ? values[i + 1] : 0U;
    *packed++ = static_cast<unsigned char>(first >> 4U);
    *packed++ = static_cast<unsigned char>(((first & 15U) << 4U) | (second >> 8U));
    if (i + 1 < count) *packed++ = static_cast<unsigned char>(second & 255U);
  }
}

std::vector<unsigned char> packed_page(const std::uint16_t* pixels, int width, int height) {
  const std::size_t row = row_bytes(width, PixelFormat::packed12);
  std::vector<unsigned char> bytes(row * static_cast<std::size_t>(height));
  for (int y = 0; y < height; ++y) {
    const std::uint16_t* values = pixels + static_cast<std::ptrdiff_t>(y) * width;
    if (std::any_of(values, values + width, [](std::uint16_t value) { return value > 4095; })) {
      throw Problem("A pixel above 4095 does not fit into 12 bits; write 16 bits instead.");
    }
    pack12(values, width, bytes.data() + row * static_cast<std::size_t>(y));
  }
  return bytes;
}

}  // namespace

class TiffWriter::Pages {
 public:
  Pages(const std::filesystem::path& file, const TiffLayout& layout)
      : file_(file),
        aside_(file.string() + ".part"),
        layout_(layout),
        tiff_(aside_, open_mode(layout).c_str()) {
    if (!tiff_) refuse("cannot be made");
    if (layout.tile_px % 16 != 0 || layout.tile_px < 0) {
      throw Problem("The tile side of " + file.string() + " must be a multiple of 16 pixels.");
    }
    if (layout.tile_px != 0 && layout.format == PixelFormat::packed12) {
      throw Problem("Packed 12-bit pages are written in strips; leave out tiles for " +
                    file.string() + ".");
    }
  }

  ~Pages() {
    if (committed_) return;
    tiff_.close();
    std::error_code ignored;
    std::filesystem::remove(aside_, ignored);
  }

  Pages(const Pages&) = delete;
  Pages& operator=(const Pages&) = delete;

  void write(const void* pixels, PixelFormat given, int width, int height) {
    if (width < 1 || height < 1) throw Problem("A page of " + file_.string() + " has no pixels.");
    if (given != layout_.format) {
      throw Problem("The pixels given for " + file_.string() + " are not of the file's type.");
    }
    set_tags(width, height);
    const auto* bytes = static_cast<const unsigned char*>(pixels);
    if (layout_.tile_px > 0) {
      write_tiles(bytes, width, height);
    } else {
      write_strips(bytes, width, height);
    }
    if (TIFFWriteDirectory(tiff_.get()) == 0) refuse("cannot be written");
    ++pages_;
  }

  PixelFormat format() const { return layout_.format; }
  int pages() const { return pages_; }

  void commit() {
    if (committed_) return;
    errno = 0;
    if (TIFFFlush(tiff_.get()) == 0 || ::fsync(TIFFFileno(tiff_.get())) != 0) {
      refuse("cannot be written");
    }
    tiff_.close();
    std::error_code error;
    std::filesystem::rename(aside_, file_, error);
    if (error) {
      throw Problem("The file " + file_.string() + " cannot be put in place: " + error.message() +
                    ".");
    }
    committed_ = true;
  }

 private:
  [[noreturn]] void refuse(const std::string& what) const {
    const std::string system = errno != 0 ? std::strerror(errno) : "";
    const std::string why = !tiff_.error().empty() ? tiff_.error() : system;
    throw Problem("The file " + file_.string() + " " + what + (why.empty() ? "" : ": " + why) +
                  "; check the folder and the free space on its disk.");
  }

  void set_tags(int width, int height) {
    TIFF* tiff = tiff_.get();
    TIFFSetField(tiff, TIFFTAG_IMAGEWIDTH, static_cast<std::uint32_t>(width));
    TIFFSetField(tiff, TIFFTAG_IMAGELENGTH, static_cast<std::uint32_t>(height));
    TIFFSetField(tiff, TIFFTAG_BITSPERSAMPLE, bits_per_sample(layout_.format));
    TIFFSetField(tiff, TIFFTAG_SAMPLESPERPIXEL, 1);
    TIFFSetField(tiff, TIFFTAG_PLANARCONFIG, PLANARCONFIG_CONTIG);
    TIFFSetField(tiff, TIFFTAG_PHOTOMETRIC, PHOTOMETRIC_MINISBLACK);
    TIFFSetField(tiff, TIFFTAG_SAMPLEFORMAT,
                 layout_.format == PixelFormat::float32 ? SAMPLEFORMAT_IEEEFP : SAMPLEFORMAT_UINT);
    set_compression();
    if (layout_.tile_px > 0) {
      TIFFSetField(tiff, TIFFTAG_TILEWIDTH, static_cast<std::uint32_t>(layout_.tile_px));
      TIFFSetField(tiff, TIFFTAG_TILELENGTH, static_cast<std::uint32_t>(layout_.tile_px));
    } else {
      TIFFSetField(tiff, TIFFTAG_ROWSPERSTRIP,
                   static_cast<std::uint32_t>(rows_per_strip(width, height)));
    }
    if (pages_ == 0 && !layout_.description.empty()) {
      TIFFSetField(tiff, TIFFTAG_IMAGEDESCRIPTION, layout_.description.c_str());
    }
  }

  void set_compression() {
    TIFF* tiff = tiff_.get();
    if (TIFFSetField(tiff, TIFFTAG_COMPRESSION, compression_tag(layout_.compression)) == 0) {
      refuse("cannot be compressed that way");
    }
    if (layout_.compression == TiffCompression::none) return;
    const bool integers =
        layout_.format != PixelFormat::float32 && layout_.format != PixelFormat::packed12;
    if (layout_.predictor && integers) {
      TIFFSetField(tiff, TIFFTAG_PREDICTOR, PREDICTOR_HORIZONTAL);
    }
    if (layout_.level <= 0) return;
    if (layout_.compression == TiffCompression::deflate) {
      TIFFSetField(tiff, TIFFTAG_ZIPQUALITY, layout_.level);
    } else if (layout_.compression == TiffCompression::zstd) {
      TIFFSetField(tiff, TIFFTAG_ZSTD_LEVEL, layout_.level);
    }
  }

  int rows_per_strip(int width, int height) const {
    if (layout_.rows_per_strip > 0) return std::min(layout_.rows_per_strip, height);
    constexpr std::size_t strip_bytes = 65536;
    const std::size_t rows = strip_bytes / row_bytes(width, layout_.format);
    return static_cast<int>(std::clamp<std::size_t>(rows, 1, static_cast<std::size_t>(height)));
  }

  void write_strips(const unsigned char* bytes, int width, int height) {
    const std::size_t row = row_bytes(width, layout_.format);
    const int rows = rows_per_strip(width, height);
    std::vector<unsigned char> strip;
    for (int top = 0, index = 0; top < height; top += rows, ++index) {
      const std::size_t size = row * static_cast<std::size_t>(std::min(rows, height - top));
      const unsigned char* first = bytes + row * static_cast<std::size_t>(top);
      // libtiff swaps bytes and takes differences in the buffer that it is given.
      strip.assign(first, first + size);
      if (TIFFWriteEncodedStrip(tiff_.get(), static_cast<std::uint32_t>(index), strip.data(),
                                static_cast<tmsize_t>(size)) < 0) {
        refuse("cannot be written");
      }
    }
  }

  void write_tiles(const unsigned char* bytes, int width, int height) {
    const auto side = static_cast<std::size_t>(layout_.tile_px);
    const std::size_t pixel = row_bytes(1, layout_.format);
    const std::size_t row = row_bytes(width, layout_.format);
    std::vector<unsigned char> tile(side * side * pixel);
    std::uint32_t index = 0;
    for (int top = 0; top < height; top += layout_.tile_px) {
      for (int left = 0; left < width; left += layout_.tile_px) {
        std::fill(tile.begin(), tile.end(), static_cast<unsigned char>(0));
        const auto columns = static_cast<std::size_t>(std::min(layout_.tile_px, width - left));
        const int bottom = std::min(top + layout_.tile_px, height);
        for (int y = top; y < bottom; ++y) {
          std::memcpy(
              tile.data() + static_cast<std::size_t>(y - top) * side * pixel,
              bytes + static_cast<std::size_t>(y) * row + static_cast<std::size_t>(left) * pixel,
              columns * pixel);
        }
        if (TIFFWriteEncodedTile(tiff_.get(), index++, tile.data(),
                                 static_cast<tmsize_t>(tile.size())) < 0) {
          refuse("cannot be written");
        }
      }
    }
  }

  std::filesystem::path file_, aside_;
  TiffLayout layout_;
  TiffHandle tiff_;
  int pages_ = 0;
  bool committed_ = false;
};

TiffWriter::TiffWriter(const std::filesystem::path& file, const TiffLayout& layout)
    : pages_(std::make_unique<Pages>(file, layout)) {}

TiffWriter::~TiffWriter() = default;

void TiffWriter::write(const std::uint8_t* pixels, int width, int height) {
  pages_->write(pixels, PixelFormat::unsigned8, width, height);
}

void TiffWriter::write(const std::uint16_t* pixels, int width, int height) {
  if (pages_->format() == PixelFormat::packed12) {
    const auto bytes = packed_page(pixels, width, height);
    pages_->write(bytes.data(), PixelFormat::packed12, width, height);
  } else {
    pages_->write(pixels, PixelFormat::unsigned16, width, height);
  }
}

void TiffWriter::write(const std::uint32_t* pixels, int width, int height) {
  pages_->write(pixels, PixelFormat::unsigned32, width, height);
}

void TiffWriter::write(const float* pixels, int width, int height) {
  pages_->write(pixels, PixelFormat::float32, width, height);
}

int TiffWriter::pages() const {
  return pages_->pages();
}

void TiffWriter::commit() {
  pages_->commit();
}

}  // namespace wavefount
