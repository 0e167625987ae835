#include "plane_decoder.h"

#include <unistd.h>

#include <algorithm>
#include <cerrno>

#include "samples.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

/// Read and converted while still in the second-level cache.
constexpr std::uint64_t block_bytes = std::uint64_t{1} << 18U;

std::uint32_t rows_per_strip(TIFF* tiff, const TiffPage& page) {
  std::uint32_t rows = 0;
  TIFFGetFieldDefaulted(tiff, TIFFTAG_ROWSPERSTRIP, &rows);
  return std::clamp<std::uint32_t>(rows, 1, static_cast<std::uint32_t>(page.height));
}

bool lowest_bit_first(TIFF* tiff) {
  std::uint16_t order = FILLORDER_MSB2LSB;
  TIFFGetFieldDefaulted(tiff, TIFFTAG_FILLORDER, &order);
  return order == FILLORDER_LSB2MSB;
}

/// Rows that follow each other in the file without a gap.
struct Run {
  std::uint64_t offset = 0;
  std::uint32_t rows = 0;
};

Run run_from(TIFF* tiff, const TiffPage& page, std::uint32_t row, std::uint32_t strip_rows,
             std::uint32_t most_rows) {
  const auto height = static_cast<std::uint32_t>(page.height);
  std::uint32_t strip = row / strip_rows;
  const std::uint32_t skipped = row % strip_rows;
  Run run{TIFFGetStrileOffset(tiff, strip) + skipped * row_bytes(page),
          std::min(strip_rows, height - strip * strip_rows) - skipped};
  while (run.rows < most_rows && row + run.rows < height &&
         TIFFGetStrileOffset(tiff, strip + 1) == run.offset + run.rows * row_bytes(page)) {
    ++strip;
    run.rows += std::min(strip_rows, height - strip * strip_rows);
  }
  run.rows = std::min(run.rows, most_rows);
  return run;
}

}  // namespace

PlaneDecoder::PlaneDecoder(const std::filesystem::path& file) : file_(file), tiff_(file, "rmh") {
  if (!tiff_) refuse("cannot be opened any more");
}

void PlaneDecoder::refuse(const std::string& what) const {
  throw Problem("The file " + file_.filename().string() + " " + what +
                (tiff_.error().empty() ? "" : " (" + tiff_.error() + ")") +
                "; copy it again from where it was recorded.");
}

ImagePointer PlaneDecoder::read(const TiffPage& page) {
  tiff_.forget_error();
  if (!page.problem.empty()) refuse("has a page that " + page.problem);
  if (TIFFSetSubDirectory(tiff_.get(), page.directory) == 0)
    refuse("has changed while it was read");
  const auto now = describe_page(tiff_.get());
  if (now.width != page.width || now.height != page.height || now.bits != page.bits ||
      now.kind != page.kind || now.compression != page.compression || now.tiled != page.tiled ||
      !now.problem.empty()) {
    refuse("has changed while it was read");
  }
  auto image = make_image(page.width, page.height);
  float* pixels = image->GetBufferPointer();
  if (page.tiled) {
    read_tiles(page, pixels);
  } else if (page.compression == COMPRESSION_NONE && !lowest_bit_first(tiff_.get())) {
    read_plain_strips(page, pixels);
  } else {
    read_coded_strips(page, pixels);
  }
  if (page.inverted) {
    invert(page, pixels,
           static_cast<std::size_t>(page.width) * static_cast<std::size_t>(page.height));
  }
  return image;
}

void PlaneDecoder::read_bytes(std::uint64_t offset, std::size_t bytes) {
  if (buffer_.size() < bytes) buffer_.resize(bytes);
  for (std::size_t done = 0; done < bytes;) {
    const auto got = ::pread(TIFFFileno(tiff_.get()), buffer_.data() + done, bytes - done,
                             static_cast<off_t>(offset + done));
    if (got < 0 && errno == EINTR) continue;
    if (got <= 0) refuse("ends before its pixels do");
    done += static_cast<std::size_t>(got);
  }
}

void PlaneDecoder::read_plain_strips(const TiffPage& page, float* pixels) {
  const std::uint64_t row_size = row_bytes(page);
  const std::uint32_t strip_rows = rows_per_strip(tiff_.get(), page);
  const auto most_rows =
      static_cast<std::uint32_t>(std::max<std::uint64_t>(1, block_bytes / row_size));
  const auto width = static_cast<std::size_t>(page.width);
  const bool swap = TIFFIsByteSwapped(tiff_.get()) != 0;
  for (std::uint32_t row = 0; row < static_cast<std::uint32_t>(page.height);) {
    const Run run = run_from(tiff_.get(), page, row, strip_rows, most_rows);
    read_bytes(run.offset, static_cast<std::size_t>(run.rows * row_size));
    convert_samples(page, buffer_.data(), static_cast<std::size_t>(row_size), page.width,
                    static_cast<int>(run.rows), swap, pixels + row * width, width);
    row += run.rows;
  }
}

void PlaneDecoder::read_coded_strips(const TiffPage& page, float* pixels) {
  const auto row_size = static_cast<std::size_t>(row_bytes(page));
  const std::uint32_t strip_rows = rows_per_strip(tiff_.get(), page);
  const auto width = static_cast<std::size_t>(page.width);
  const auto height = static_cast<std::uint32_t>(page.height);
  buffer_.resize(std::max(buffer_.size(), row_size * strip_rows));
  for (std::uint32_t row = 0; row < height; row += strip_rows) {
    const std::uint32_t rows = std::min(strip_rows, height - row);
    const auto bytes = static_cast<tmsize_t>(row_size * rows);
    if (TIFFReadEncodedStrip(tiff_.get(), row / strip_rows, buffer_.data(), bytes) != bytes) {
      refuse("has damaged pixels");
    }
    convert_samples(page, buffer_.data(), row_size, page.width, static_cast<int>(rows), false,
                    pixels + row * width, width);
  }
}

void PlaneDecoder::read_tiles(const TiffPage& page, float* pixels) {
  std::uint32_t tile_width = 0, tile_height = 0;
  TIFFGetField(tiff_.get(), TIFFTAG_TILEWIDTH, &tile_width);
  TIFFGetField(tiff_.get(), TIFFTAG_TILELENGTH, &tile_height);
  const auto bytes = TIFFTileSize(tiff_.get());
  const auto stride = static_cast<std::size_t>(TIFFTileRowSize(tiff_.get()));
  const auto width = static_cast<std::uint32_t>(page.width);
  const auto height = static_cast<std::uint32_t>(page.height);
  if (tile_width == 0 || tile_height == 0 || bytes <= 0) refuse("has tiles without size");
  buffer_.resize(std::max(buffer_.size(), static_cast<std::size_t>(bytes)));
  std::uint32_t tile = 0;
  for (std::uint32_t top = 0; top < height; top += tile_height) {
    for (std::uint32_t left = 0; left < width; left += tile_width, ++tile) {
      if (TIFFReadEncodedTile(tiff_.get(), tile, buffer_.data(), bytes) != bytes) {
        refuse("has damaged pixels");
      }
      convert_samples(page, buffer_.data(), stride,
                      static_cast<int>(std::min(tile_width, width - left)),
                      static_cast<int>(std::min(tile_height, height - top)), false,
                      pixels + std::size_t{top} * width + left, width);
    }
  }
}

}  // namespace wavefount
