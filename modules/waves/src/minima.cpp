#include "wavefount/waves/minima.h"

#include <algorithm>
#include <numeric>

namespace wavefount {
namespace {

/// The growing sublevel set: its connected parts and the basins inside them.
class Flooding {
 public:
  Flooding(const std::vector<double>& field, const FieldGraph& graph, double least_prominence)
      : field_(field),
        graph_(graph),
        least_(least_prominence),
        part_(field.size(), -1),
        basin_(field.size(), -1) {}

  Basins run() {
    std::vector<int> order(field_.size());
    std::iota(order.begin(), order.end(), 0);
    std::stable_sort(order.begin(), order.end(),
                     [this](int a, int b) { return field_[a] < field_[b]; });
    for (const int place : order) flood(place);
    return result();
  }

 private:
  int part_of(int place) const {
    int part = part_[place];
    while (joined_[part] != part) part = joined_[part];
    return part;
  }

  void flood(int place) {
    int lowest = -1;
    const auto& around = graph_.neighbours[place];
    for (const int near : around) {
      if (part_[near] >= 0 && (lowest < 0 || field_[near] < field_[lowest])) lowest = near;
    }
    if (lowest < 0) {
      part_[place] = basin_[place] = static_cast<int>(minima_.size());
      joined_.push_back(part_[place]);
      absorbed_.push_back(part_[place]);
      minima_.push_back({place, field_[place], std::nullopt, false});
      return;
    }
    part_[place] = part_of(lowest);
    basin_[place] = basin_[lowest];
    for (std::size_t i = 0; i < around.size(); ++i) {
      if (around[i] != lowest && part_[around[i]] >= 0) meet(place, lowest, around[i]);
    }
  }

  void meet(int saddle, int lowest, int other) {
    const int one = part_of(saddle);
    const int two = part_of(other);
    if (one == two) return;
    const int older = std::min(one, two);  // numbered by rising minimum
    const int younger = std::max(one, two);
    joined_[younger] = older;
    auto& minimum = minima_[younger];
    minimum.prominence = field_[saddle] - minimum.value;
    minimum.behind_gap = crosses_gap(saddle, lowest) || crosses_gap(saddle, other);
    if (*minimum.prominence < least_) {
      // Absorbed into the basin it meets, which itself may be part of another.
      const int into = younger == one ? basin_[other] : basin_[lowest];
      absorbed_[younger] = into;
    }
  }

  bool crosses_gap(int from, int to) const {
    const auto& around = graph_.neighbours[from];
    const auto at = std::find(around.begin(), around.end(), to) - around.begin();
    return graph_.over_gap[from][at] != 0;
  }

  int kept_basin(int basin) const {
    while (absorbed_[basin] != basin) basin = absorbed_[basin];
    return basin;
  }

  Basins result() const {
    Basins result;
    std::vector<int> position(minima_.size(), -1);
    for (int i = 0; i < static_cast<int>(minima_.size()); ++i) {
      if (kept_basin(i) != i) continue;
      position[i] = static_cast<int>(result.minima.size());
      result.minima.push_back(minima_[i]);
    }
    for (const int basin : basin_) result.basin.push_back(position[kept_basin(basin)]);
    return result;
  }

  const std::vector<double>& field_;
  const FieldGraph& graph_;
  double least_;
  std::vector<int> part_, basin_;
  std::vector<int> joined_, absorbed_;
  std::vector<Minimum> minima_;
};

}  // namespace

Basins find_minima(const std::vector<double>& field, const FieldGraph& graph,
                   double least_prominence) {
  return Flooding(field, graph, least_prominence).run();
}

}  // namespace wavefount
