#include "wavefount/tube/binning.h"

#include <algorithm>
#include <cstddef>
#include <vector>

namespace wavefount::tube {
namespace {

/// Sums of `Factor` neighbours along a row; the constant lets the compiler unroll.
template <int Factor>
void gather(const float* line, int width, float scale, float* out) {
  for (int x = 0; x < width; ++x) {
    float sum = 0;
    for (int k = 0; k < Factor; ++k) sum += line[x * Factor + k];
    out[x] = sum * scale;
  }
}

void gather_any(const float* line, int factor, int width, float scale, float* out) {
  for (int x = 0; x < width; ++x) {
    float sum = 0;
    for (int k = 0; k < factor; ++k) sum += line[x * factor + k];
    out[x] = sum * scale;
  }
}

void gather_row(const float* line, int factor, int width, float scale, float* out) {
  switch (factor) {
    case 1:
      return gather<1>(line, width, scale, out);
    case 2:
      return gather<2>(line, width, scale, out);
    case 3:
      return gather<3>(line, width, scale, out);
    case 4:
      return gather<4>(line, width, scale, out);
    case 5:
      return gather<5>(line, width, scale, out);
    case 6:
      return gather<6>(line, width, scale, out);
    default:
      return gather_any(line, factor, width, scale, out);
  }
}

}  // namespace

void bin_mean(const Image& full, int factor, int left, int top, Image& reduced) {
  const int full_width = image_width(full);
  const int width = image_width(reduced);
  const int height = image_height(reduced);
  const int span = width * factor;
  std::vector<float> line(static_cast<std::size_t>(span));
  const float scale = 1.0F / static_cast<float>(factor * factor);
  for (int y = 0; y < height; ++y) {
    const float* row =
        full.GetBufferPointer() + static_cast<std::ptrdiff_t>(top + y * factor) * full_width + left;
    std::copy(row, row + span, line.begin());
    for (int k = 1; k < factor; ++k) {
      const float* next = row + static_cast<std::ptrdiff_t>(k) * full_width;
      for (int x = 0; x < span; ++x) line[static_cast<std::size_t>(x)] += next[x];
    }
    gather_row(line.data(), factor, width, scale,
               reduced.GetBufferPointer() + static_cast<std::ptrdiff_t>(y) * width);
  }
}

ImagePointer bin_mean(const Image& full, int factor) {
  auto reduced = make_image(image_width(full) / factor, image_height(full) / factor);
  bin_mean(full, factor, 0, 0, *reduced);
  return reduced;
}

}  // namespace wavefount::tube
