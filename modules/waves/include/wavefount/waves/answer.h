#pragma once

#include "wavefount/core/wave.h"
#include "wavefount/waves/candidates.h"
#include "wavefount/waves/origins.h"

namespace wavefount {

/// What the answer of one wave is taken from.
struct Findings {
  std::size_t timed = 0;       ///< nuclei
  double order_p = 1;          ///< of order in space
  double spread_min = 0;       ///< of the entry times beyond their errors
  double field_range_min = 0;  ///< of the mean field
  double scatter_min = 0;      ///< what jitter alone explains
  double finest_min = 0;       ///< spread that timing resolves
  bool number_doubtful = false;
  bool began_before_film = false;
  Candidates candidates;
};

/// The first that holds, in the contract's order.
Answer answer_of(const Findings& findings, const OriginRules& rules);

/// Reasons in a word or two with a sentence each, and whether they make a person look.
void add_reasons(Wave& wave, const WaveEntries& entries, const Findings& findings);

}  // namespace wavefount
