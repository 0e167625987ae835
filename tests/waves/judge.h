#pragma once

#include <array>
#include <string>

#include "scenes.h"
#include "wavefount/core/wave.h"
#include "wavefount/waves/arrival_fields.h"

namespace wavefount::testing {

/// What the module found in a scene.
struct Measured {
  WaveEntries entries;
  Waves waves;
  ArrivalFields fields;
  double seconds = 0;
};

Measured measure(const Scene& scene, std::uint64_t seed);

/// Counts over many scenes.
struct Tally {
  int scenes = 0, waves = 0, found = 0, spurious = 0;
  int travelling = 0, with_speed = 0, slowness_covered = 0;
  std::vector<double> speed_errors;  ///< relative
  int sources = 0, right = 0, missed = 0, invented = 0;
  int claims_unfounded = 0;  ///< claimed in waves without a source in view
  std::array<int, 7> answers{};
  std::array<int, 10> candidates{}, true_candidates{};  ///< by decile of the probability
  double seconds = 0;
};

void judge(const Scene& scene, const Measured& outcome, Tally& tally);
void add(const Tally& tally, Tally& total);
void print(const std::string& name, const Tally& tally);
/// Of the candidates with a probability in each tenth, how many were true.
void print_reliability(const Tally& tally);

}  // namespace wavefount::testing
