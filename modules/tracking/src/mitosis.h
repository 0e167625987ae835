#pragma once

#include <vector>

#include "mitosis_model.h"

namespace wavefount::tracking {

/// Segments joined over mitosis.
struct Lineage {
  std::vector<int> next;       ///< by segment: the one it goes on as, or -1
  std::vector<int> previous;   ///< by segment, or -1
  std::vector<int> mother;     ///< by segment: re-formed as a second nucleus from this one, or -1
  std::vector<bool> doubtful;  ///< by segment: another pairing for its start fits nearly as well
  std::vector<double> mitosis_min;  ///< by segment: time out of sight before it; 0 when not known
  MitosisModel model;
};

/// Joins ends with starts: nearest re-formation to the predicted place, all pairs of the film at
/// once, time out of sight and displacement in units estimated from pairs without a rival.
Lineage link_mitoses(const FilmDetections& film, const Motion& motion, const Flow& flow,
                     const std::vector<Segment>& segments, const Evidence& evidence,
                     const LinkSettings& settings);

}  // namespace wavefount::tracking
