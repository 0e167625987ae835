#pragma once

#include "wavefount/core/image.h"

namespace wavefount::tube {

/// Means over squares of `factor` × `factor` full-size pixels. `reduced` gives the size; its pixel
/// (i, j) covers the full-size pixels from (left + i · factor, top + j · factor), all of which lie
/// inside `full`. Hot: one pass over the pixels, rows added up first so that the loop vectorises.
void bin_mean(const Image& full, int factor, int left, int top, Image& reduced);

/// The whole image reduced; pixels left over at the right and bottom are dropped. Both sides must
/// be at least `factor`.
ImagePointer bin_mean(const Image& full, int factor);

/// A reduced pixel's place among the full-size pixels, and back.
inline double to_full_px(double reduced_px, int factor) {
  return reduced_px * factor + (factor - 1) / 2.0;
}
inline double to_reduced_px(double full_px, int factor) {
  return (full_px - (factor - 1) / 2.0) / factor;
}

}  // namespace wavefount::tube
