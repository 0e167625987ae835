#pragma once

#include <optional>
#include <vector>

#include "wavefount/core/tube.h"
#include "wavefount/waves/minima.h"
#include "wavefount/waves/neighbours.h"
#include "wavefount/waves/source_model.h"

namespace wavefount {

/// A place where many of the drawn fields have a minimum.
struct Candidate {
  int leader = 0;  ///< arrival that comes first there in most draws
  Point place_um;  ///< mean over the draws, straightened
  double position_se_um = 0;
  double probability = 0;  ///< share of draws that have it
  double first_share = 0;  ///< share of its draws in which it is the earliest
  double entry_min = 0;
  std::optional<double> prominence_min, prominence_se_min;  ///< over draws where it is not first
  std::vector<int> basin;  ///< arrivals that belong to it in more than half of its draws
  bool at_view_edge = false;
  bool behind_gap = false;  ///< in most of its draws the saddle was a bridge
};

struct CandidateSearch {
  double spacing_um = 0;
  const Tube* tube = nullptr;
  bool wide = false;
};

/// What the drawn fields say together.
struct Candidates {
  std::vector<Candidate> found;     ///< most probable first; probability at least a twentieth
  double alone_probability = 0;     ///< of exactly one minimum, the first candidate
  double joint_probability = 0;     ///< of all candidates more likely than not, at once
  double entering_probability = 0;  ///< of a front that comes in over an open edge
  double visible_probability = 0;   ///< of a field that varies beyond a third of jitter and error
  double range_min = 0;             ///< median over draws: latest less earliest place of the field
  std::vector<int> basin;           ///< by arrival: the likeliest candidate, -1 for none
};

/// Finds the minima of every drawn field and matches them: a draw has a candidate when its minimum
/// lies within one spacing and the basins overlap by half.
Candidates find_candidates(const Arrivals& arrivals, const SourceFit& fit,
                           const std::vector<Link>& links, const CandidateSearch& search);

/// Open edges of the view by arrival, as a sum of ViewEdge, from which no other nucleus of the wave
/// parts it: the point of the edge nearest to it is nearer to no other.
enum ViewEdge : unsigned { left_edge = 1, right_edge = 2, upper_edge = 4, lower_edge = 8 };
std::vector<unsigned> view_edges(const Arrivals& arrivals, const Tube& tube, bool wide);

}  // namespace wavefount
