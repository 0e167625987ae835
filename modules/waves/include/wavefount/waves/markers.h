#pragma once

#include <vector>

#include "wavefount/core/interphase.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/wave.h"
#include "wavefount/waves/chronology.h"

namespace wavefount {

/// Fitted brightness of every nucleus of the wave at one common age: 80 % of the shortest
/// interphase that was seen from formation to this wave, since a mean depends on the length.
void set_brightness_at_age(const Wave& wave, WaveEntries& entries, const Interphases& interphases);

/// Everything that may mark a leader is ranked or compared within the wave.
struct MarkerView {
  const Wave* wave = nullptr;
  const WaveEntries* entries = nullptr;
  const Interphases* interphases = nullptr;
  const Nuclei* nuclei = nullptr;
  const Territories* territories = nullptr;
  const Chronology* chronology = nullptr;
};

/// Sets the leader's percentiles in brightness, import and territory among the wave's nuclei (ties
/// count half), and its period over the basin's median and over the slowest tenth, from cycles
/// that neither start nor end at this wave. `leader` and `basin`: positions in Wave::entries.
void set_markers(Origin& origin, int leader, const std::vector<int>& basin, const MarkerView& view);

}  // namespace wavefount
