#pragma once

#include "wavefount/core/interphase.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"

namespace wavefount {

struct FateRules {
  double film_end_min = 0;  ///< last usable frame
  double spacing_um = 0;    ///< a nucleus that forms within half of it is the same one
  /// Stands for the film's median time in mitosis where no nucleus formed again: "5 to 20 min".
  double longest_mitosis_min = 20;
};

/// Whether the wave's nuclei formed again within twice the median time in mitosis. A nucleus whose
/// track ends at mitosis formed again when another track begins at its place in that time. Nuclei
/// at an open edge may have left the view and count only when they were seen again.
Fate fate_of(const Wave& wave, const WaveEntries& entries, const Interphases& interphases,
             const Nuclei& nuclei, const Tube& tube, const FateRules& rules);

}  // namespace wavefount
