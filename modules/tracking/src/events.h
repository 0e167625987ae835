#pragma once

#include <vector>

#include "chains.h"
#include "wavefount/core/nucleus.h"

namespace wavefount::tracking {

/// How one chain came of others. A fusion names the chain that goes on with the light of the other;
/// a fragment or a daughter the chain that starts.
struct KinshipEvent {
  int chain = 0;
  int parent = 0;  ///< chain
  Kinship kinship = Kinship::none;
  double time_min = 0;
};

/// Divisions of the lineage; fusions, where an end without continuation touches a nucleus that
/// gains its light; fragments, where a start touches a nucleus that loses as much. By chain, then
/// time.
std::vector<KinshipEvent> find_kinship(const FilmDetections& film,
                                       const std::vector<Segment>& segments, const Lineage& lineage,
                                       const std::vector<Chain>& chains);

}  // namespace wavefount::tracking
