#pragma once

#include <cstdint>
#include <optional>
#include <vector>

#include "wavefount/waves/field.h"
#include "wavefount/waves/minima.h"
#include "wavefount/waves/neighbours.h"

namespace wavefount {

/// A place where many of the drawn fields have a minimum.
struct Candidate {
  int leader = 0;  ///< arrival nearest to the minimum in most draws
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
  int draws = 400;
  double spacing_um = 0;
  double least_prominence_min = 0;
  std::vector<char> at_view_edge;  ///< by arrival
  std::uint64_t seed = 0;
};

/// What the drawn fields say together.
struct Candidates {
  std::vector<Candidate> found;     ///< most probable first; probability at least a twentieth
  double alone_probability = 0;     ///< of exactly one minimum, the first candidate
  double joint_probability = 0;     ///< of all candidates more likely than not, at once
  double entering_probability = 0;  ///< of a minimum at an open edge of the view
  std::vector<int> basin;  ///< by arrival: candidate more likely than not that it belongs to
};

/// Draws whole fields from the posterior over nuclei and the middles of their links, finds the
/// minima of each, and matches them: a draw has a candidate when its minimum lies within one
/// spacing and the basins overlap by half.
Candidates find_candidates(const Arrivals& arrivals, const FieldFit& fit,
                           const std::vector<Link>& links, const CandidateSearch& search);

/// Posterior mean of the field and its standard deviation at the arrivals' places.
struct MeanField {
  std::vector<double> mean_min, se_min;
};
MeanField mean_field(const Arrivals& arrivals, const FieldFit& fit);

/// The graph over arrivals alone.
FieldGraph field_graph(std::size_t places, const std::vector<Link>& links);

/// Share of random smooth fields with the wave's fitted scales whose minimum lies at each arrival.
std::vector<double> chance_of_first(const Arrivals& arrivals, const FieldFit& fit,
                                    double trend_sd_min_per_um, int draws, std::uint64_t seed);

}  // namespace wavefount
