#pragma once

#include <cstdint>

#include "wavefount/core/film.h"
#include "wavefount/core/interphase.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"
#include "wavefount/waves/arrival_fields.h"
#include "wavefount/waves/chronology.h"

namespace wavefount {

/// The entries of all interphases that ended in one, with their places in the tube; those outside
/// the healthy part of the film are left out.
WaveEntries entries_of(const Interphases& interphases, const Tube& tube,
                       const FilmOverrides& overrides);

struct WaveRules {
  NeighbourRules neighbours;
  double longest_mitosis_min = 20;  ///< where the film shows no re-formation
  double unseen_jitter_min = 1;     ///< where no wave has five nuclei to tell the jitter from
  double least_se_min = 0;          ///< of an entry time, whatever its own standard error says
  double film_end_min = 0;
  int draws = 400;  ///< whole fields a wave
  std::uint64_t seed = 0;
};

struct WaveView {
  const Tube* tube = nullptr;
  const Interphases* interphases = nullptr;
  const Nuclei* nuclei = nullptr;
  const Chronology* chronology = nullptr;
};

/// Waves with start, end, period, fate, jitter, arms and slowness; and the fields behind them.
struct FoundWaves {
  Waves waves;
  ArrivalFields fields;
};
FoundWaves find_waves(WaveEntries& entries, const WaveView& view, const WaveRules& rules);

/// Spread moments of the film at which territories are looked at.
std::vector<double> spread_moments(const std::vector<double>& times_min);

}  // namespace wavefount
