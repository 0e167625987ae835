#pragma once

#include <optional>
#include <vector>

#include "wavefount/core/interphase.h"
#include "wavefount/timing/course.h"

namespace wavefount {

/// One interphase before its entry is timed.
struct OpenInterphase {
  Interphase interphase;     ///< outcome: entered when a fall ends it, not timed yet
  std::optional<Fall> fall;  ///< into its course
  std::size_t start = 0;     ///< into its course: the first value that belongs to it
};

/// Splits a course at its falls. A stretch in which the nucleus was found less than twice is none:
/// the place then belongs to another. `last_frame` of the film decides between unfinished and lost.
std::vector<OpenInterphase> split_course(const Course& course, int last_frame);

}  // namespace wavefount
