#include "png_file.h"

#include <png.h>

#include <cerrno>
#include <csetjmp>
#include <cstdint>
#include <cstdio>
#include <cstring>
#include <memory>
#include <vector>

#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

constexpr int compression_level = 1;

struct Closer {
  void operator()(std::FILE* file) const { std::fclose(file); }
};

[[noreturn]] void refuse(const std::filesystem::path& file) {
  throw Problem("The picture " + file.string() + " cannot be written: " + std::strerror(errno) +
                "; free space there or choose another --out.");
}

void unpack_row(const unsigned char* row, std::vector<png_byte>& rgb) {
  for (std::size_t x = 0; x < rgb.size() / 3; ++x) {
    std::uint32_t pixel = 0;
    std::memcpy(&pixel, row + 4 * x, sizeof pixel);
    rgb[3 * x] = static_cast<png_byte>(pixel >> 16U);
    rgb[3 * x + 1] = static_cast<png_byte>(pixel >> 8U);
    rgb[3 * x + 2] = static_cast<png_byte>(pixel);
  }
}

/// libpng reports errors by a long jump: nothing in here may own anything. False when it failed.
bool encode(png_structp png, png_infop info, std::FILE* file, const unsigned char* pixels,
            int width, int height, int stride, std::vector<png_byte>& rgb) {
  if (setjmp(png_jmpbuf(png)) != 0) return false;
  png_init_io(png, file);
  png_set_compression_level(png, compression_level);
  png_set_filter(png, PNG_FILTER_TYPE_BASE, PNG_FILTER_SUB);
  png_set_IHDR(png, info, static_cast<png_uint_32>(width), static_cast<png_uint_32>(height), 8,
               PNG_COLOR_TYPE_RGB, PNG_INTERLACE_NONE, PNG_COMPRESSION_TYPE_DEFAULT,
               PNG_FILTER_TYPE_DEFAULT);
  png_write_info(png, info);
  for (int y = 0; y < height; ++y) {
    unpack_row(pixels + static_cast<std::ptrdiff_t>(y) * stride, rgb);
    png_write_row(png, rgb.data());
  }
  png_write_end(png, info);
  return true;
}

}  // namespace

void write_png_file(const std::filesystem::path& file, const unsigned char* pixels, int width,
                    int height, int stride) {
  std::unique_ptr<std::FILE, Closer> stream(std::fopen(file.c_str(), "wbe"));
  if (!stream) refuse(file);
  png_structp png = png_create_write_struct(PNG_LIBPNG_VER_STRING, nullptr, nullptr, nullptr);
  if (!png) refuse(file);
  png_infop info = png_create_info_struct(png);
  std::vector<png_byte> rgb(3 * static_cast<std::size_t>(width));
  const bool written = info && encode(png, info, stream.get(), pixels, width, height, stride, rgb);
  png_destroy_write_struct(&png, &info);
  if (!written || std::fflush(stream.get()) != 0) refuse(file);
}

}  // namespace wavefount
