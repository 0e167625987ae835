#pragma once

#include <optional>
#include <vector>

#include "wavefount/core/interphase.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"
#include "wavefount/waves/neighbours.h"

namespace wavefount {

/// The cell cycle's period over the film's time: it lengthens as an extract ages.
class PeriodCurve {
 public:
  PeriodCurve() = default;
  /// `times_min` rising, one period each.
  PeriodCurve(std::vector<double> times_min, std::vector<double> periods_min);
  bool known() const { return !periods_min_.empty(); }
  /// Linear between the given times, constant outside; infinite when not known.
  double at(double time_min) const;

 private:
  std::vector<double> times_min_, periods_min_;
};

/// A stay of nuclei at one place: one nucleus, or several tracks that follow one another there.
struct Station {
  std::vector<int> entries;  ///< positions in WaveEntries::entries, by time
  Point place_um;
  double first_min = 0, last_min = 0;
};

/// What is known about time and place before cycles are numbered.
struct Chronology {
  double spacing_um = 0;  ///< median distance to the nearest nucleus
  std::vector<Station> stations;
  NeighbourGraph graph;  ///< of the stations
  PeriodCurve period;
};

/// Tracks broken at a mitosis are joined to stations: the next track begins after the last ended,
/// within half a spacing.
Chronology chronology_of(const std::vector<WaveEntry>& entries, const Nuclei& nuclei,
                         const Interphases& interphases, const Tube& tube,
                         const Territories& territories, const NeighbourRules& rules);

/// Mode of a sample that holds multiples and fractions of it, from its densest half over and over
/// (half-sample mode: Bickel & Frühwirth 2006); 0 for an empty one.
double half_sample_mode(std::vector<double> values);

}  // namespace wavefount
