#pragma once

#include <vector>

#include "chains.h"
#include "wavefount/core/nucleus.h"

namespace wavefount::tracking {

/// By step: far less sharp than the steps around it, so that a film's own slow changes (fewer
/// nuclei in view, growing nuclei) are not taken for loss of focus.
std::vector<bool> out_of_focus(const FilmDetections& film, const Observations& observations);

/// The points of one nucleus from its first to its last sighting, one a frame. Where it was not
/// found its place is carried from one sighting to the next along the flow; what is measured there
/// is left for later.
std::vector<TracePoint> trace_of(const FilmDetections& film, const Observations& observations,
                                 const Drift& drift, const Flow& flow,
                                 const std::vector<bool>& blurred,
                                 const std::vector<int>& detections);

}  // namespace wavefount::tracking
