#pragma once

#include <optional>
#include <vector>

#include "wavefount/waves/neighbours.h"
#include "wavefount/waves/source_model.h"

namespace wavefount {

/// One minimum of a drawn field.
struct Minimum {
  int source = 0;                    ///< position in the draw's sources
  std::optional<double> prominence;  ///< saddle to an earlier basin less start; empty: the earliest
  bool behind_gap = false;           ///< the saddle is a bridge: nobody saw the front come over it
};

struct Basins {
  std::vector<Minimum> minima;  ///< by rising start
  std::vector<int> basin;       ///< by arrival: position in `minima`
};

/// The minima of a drawn field by persistence of sublevel sets (Edelsbrunner, Letscher & Zomorodian
/// 2002). Fronts of two sources meet first over the link of neighbours on which they collide
/// earliest; a source whose saddle towards an earlier one lies less than `least_prominence_min`
/// after its start, or that is followed by no nucleus, is part of that basin. Sources without
/// nuclei of their own are not seen.
Basins find_minima(const SourceDraw& draw, const std::vector<Link>& links,
                   double least_prominence_min);

}  // namespace wavefount
