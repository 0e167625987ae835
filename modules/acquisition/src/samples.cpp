#include "samples.h"

#include <cmath>
#include <cstring>
#include <type_traits>

namespace wavefount {
namespace {

template <class Bits>
Bits swapped(Bits value) {
  if constexpr (sizeof(Bits) == 2) return __builtin_bswap16(value);
  if constexpr (sizeof(Bits) == 4) return __builtin_bswap32(value);
  return value;
}

/// One loop without branches, so that the compiler vectorises it.
template <class Sample, bool swap>
void convert_row(const unsigned char* stored, int columns, float* out) {
  using Bits =
      std::conditional_t<sizeof(Sample) == 1, std::uint8_t,
                         std::conditional_t<sizeof(Sample) == 2, std::uint16_t, std::uint32_t>>;
  for (int i = 0; i < columns; ++i) {
    Bits bits;
    std::memcpy(&bits, stored + static_cast<std::size_t>(i) * sizeof(Bits), sizeof(Bits));
    if constexpr (swap) bits = swapped(bits);
    Sample value;
    std::memcpy(&value, &bits, sizeof(value));
    out[i] = static_cast<float>(value);
  }
}

/// Two samples in three bytes, highest bits first, whatever the byte order of the file (TIFF 6.0).
void convert_packed12_row(const unsigned char* stored, int columns, float* out) {
  int i = 0;
  for (; i + 1 < columns; i += 2, stored += 3) {
    out[i] = static_cast<float>(stored[0] << 4 | stored[1] >> 4);
    out[i + 1] = static_cast<float>((stored[1] & 15) << 8 | stored[2]);
  }
  if (i < columns) out[i] = static_cast<float>(stored[0] << 4 | stored[1] >> 4);
}

using RowConverter = void (*)(const unsigned char*, int, float*);

template <class Sample>
RowConverter converter(bool swap) {
  return swap ? convert_row<Sample, true> : convert_row<Sample, false>;
}

RowConverter row_converter(const TiffPage& page, bool swap) {
  if (page.kind == SampleKind::real) return converter<float>(swap);
  const bool has_sign = page.kind == SampleKind::signed_integer;
  switch (page.bits) {
    case 8:
      return has_sign ? converter<std::int8_t>(false) : converter<std::uint8_t>(false);
    case 12:
      return convert_packed12_row;
    case 16:
      return has_sign ? converter<std::int16_t>(swap) : converter<std::uint16_t>(swap);
    default:
      return has_sign ? converter<std::int32_t>(swap) : converter<std::uint32_t>(swap);
  }
}

}  // namespace

void convert_samples(const TiffPage& page, const unsigned char* stored, std::size_t row_stride,
                     int columns, int rows, bool swap, float* out, std::size_t out_stride) {
  const auto convert = row_converter(page, swap);
  for (int row = 0; row < rows; ++row, stored += row_stride, out += out_stride) {
    convert(stored, columns, out);
  }
}

void invert(const TiffPage& page, float* pixels, std::size_t count) {
  const float white = page.kind == SampleKind::unsigned_integer
                          ? static_cast<float>(std::ldexp(1.0, page.bits) - 1)
                          : 0.0F;
  for (std::size_t i = 0; i < count; ++i) pixels[i] = white - pixels[i];
}

}  // namespace wavefount
