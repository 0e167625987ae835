#pragma once

#include <string>
#include <vector>

#include "wavefount/core/film.h"

namespace wavefount::tube {

/// Why the sidecar keeps a frame out, a sentence; empty when it does not.
std::string kept_out(const FilmDescription& film, int frame);

/// At most `count` frames spread evenly over those that the sidecar does not keep out, rising; the
/// first of them is always in. Empty when all are kept out.
std::vector<int> spread_frames(const FilmDescription& film, int count);

}  // namespace wavefount::tube
