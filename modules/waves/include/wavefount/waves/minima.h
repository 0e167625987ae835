#pragma once

#include <optional>
#include <vector>

namespace wavefount {

/// One minimum of a field over a graph.
struct Minimum {
  int place = 0;
  double value = 0;
  std::optional<double> prominence;  ///< saddle to an earlier basin less value; empty: the lowest
  bool behind_gap = false;           ///< the saddle is a bridge: nobody saw the front come over it
};

struct Basins {
  std::vector<Minimum> minima;  ///< by rising value
  std::vector<int> basin;       ///< by place: position in `minima`
};

/// A graph for fields: neighbours by place, and those among them that are reached over a gap.
struct FieldGraph {
  std::vector<std::vector<int>> neighbours;
  std::vector<std::vector<char>> over_gap;  ///< same shape
};

/// Minima by persistence of sublevel sets (Edelsbrunner, Letscher & Zomorodian 2002): a minimum
/// whose saddle towards an earlier basin lies less than `least_prominence` above it is part of that
/// basin. Parts that are not connected have each their own lowest minimum.
Basins find_minima(const std::vector<double>& field, const FieldGraph& graph,
                   double least_prominence);

}  // namespace wavefount
