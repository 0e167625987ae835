#pragma once

#include <vector>

#include "wavefount/core/record_store.h"

namespace wavefount {

/// Light along a tube in some of a film's frames.
struct Kymograph {
  int columns = 0;           ///< along the tube, from its left (top) end
  std::vector<int> frames;   ///< one a row, rising
  std::vector<float> light;  ///< rows × columns: mean across the tube, counts; −1 where unseen

  float at(std::size_t row, int column) const {
    return light[row * static_cast<std::size_t>(columns) + static_cast<std::size_t>(column)];
  }
};

/// Averages the reduced film across the tube, drift removed, in at most `most_frames` frames evenly
/// spread in time. Empty without `reduced-film`.
Kymograph kymograph_of(const RecordStore& records, int most_frames);

/// Light above the darkest tenth of the time at each place, so that uneven light and glowing walls
/// do not hide the waves; with few frames the light itself.
void remove_standing_light(Kymograph& kymograph);

}  // namespace wavefount
