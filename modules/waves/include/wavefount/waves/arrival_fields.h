#pragma once

#include <vector>

#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"
#include "wavefount/waves/candidates.h"
#include "wavefount/waves/fronts.h"
#include "wavefount/waves/source_model.h"

namespace wavefount {

/// What find-waves hands to find-origins beside the waves; the lists by position in Waves::waves,
/// arrivals in the order of Wave::entries.
struct ArrivalFields {
  static constexpr const char* record_name = "arrival-fields";
  double spacing_um = 0;
  bool wide = false;  ///< wider than two spacings: walls are sites
  bool line = false;  ///< too narrow for two nuclei side by side: the front is a point on a line
  double period_min = 0;
  std::vector<Arrivals> arrivals;
  std::vector<std::vector<Link>> links;
  std::vector<SourceFit> fits;
  std::vector<Candidates> candidates;
  std::vector<double> steepness, contradicting_share;  ///< NumberDoubt
};

/// Whether the tube has walls apart from its ends.
bool is_wide(const Tube& tube, double spacing_um, const WaveEntries& entries);

/// Whether the front is a point on a line.
bool is_line(const Tube& tube, double spacing_um, bool wide);

/// The arrivals of a wave; `least_se_min` stands for what timing leaves out of its standard errors.
Arrivals arrivals_of(const Wave& wave, const WaveEntries& entries, bool line, double least_se_min);

/// The likely candidates as sources; for waves without draws (fewer than five nuclei) the earliest
/// arrival.
std::vector<Source> sources_of(const Arrivals& arrivals, const Candidates& candidates,
                               const Tube& tube, bool wide);

}  // namespace wavefount
