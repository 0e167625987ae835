#pragma once

#include <cstdint>

#include "wavefount/core/interphase.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"
#include "wavefount/waves/arrival_fields.h"
#include "wavefount/waves/chronology.h"

namespace wavefount {

struct OriginRules {
  double claim_probability = 0.9;     ///< of the contract's `single` and `coexisting`
  double order_p = 0.05;              ///< above it a scattered wave is incoherent
  double visible_probability = 0.95;  ///< of a field beyond jitter and error
  int permutations = 999;
  std::optional<double> scatter_min;  ///< what jitter alone explains; empty: 8 % of the period
  double frame_interval_min = 0;
  double film_start_min = 0;
  std::uint64_t seed = 0;
};

/// Everything that the search for origins reads.
struct OriginView {
  const Tube* tube = nullptr;
  const Interphases* interphases = nullptr;
  const Nuclei* nuclei = nullptr;
  const Territories* territories = nullptr;
  const Chronology* chronology = nullptr;
  const ArrivalFields* fields = nullptr;
};

/// Completes waves and entries: answer, origins, site, the fronts seen from the origins, timing of
/// each nucleus, reasons and whether a person should look.
void find_origins(Waves& waves, WaveEntries& entries, const OriginView& view,
                  const OriginRules& rules);

}  // namespace wavefount
