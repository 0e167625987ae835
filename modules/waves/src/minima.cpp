#include "wavefount/waves/minima.h"

#include <algorithm>
#include <numeric>
#include <utility>

namespace wavefount {
namespace {

/// Where the fronts of two sources meet.
struct Saddle {
  double time = 0;
  int one = 0, other = 0;
  bool bridge = false;
};

std::vector<Saddle> saddles_of(const SourceDraw& draw, const std::vector<Link>& links) {
  std::vector<Saddle> saddles;
  for (const auto& link : links) {
    const int one = draw.source[link.a];
    const int other = draw.source[link.b];
    if (one == other) continue;
    // Fronts that leave two neighbours towards one another meet after the rest of the way.
    const double met = (draw.field_min[link.a] + draw.field_min[link.b] +
                        draw.slowness_min_per_um * link.length_um) /
                       2;
    saddles.push_back({met, one, other, link.bridge});
  }
  std::stable_sort(saddles.begin(), saddles.end(),
                   [](const Saddle& left, const Saddle& right) { return left.time < right.time; });
  return saddles;
}

/// The growing sublevel set, basin by basin.
class Merging {
 public:
  Merging(const SourceDraw& draw, double least) : draw_(draw), least_(least) {
    const auto count = draw.starts_min.size();
    joined_.resize(count);
    std::iota(joined_.begin(), joined_.end(), 0);
    absorbed_ = beyond_ = joined_;
    for (int i = 0; i < static_cast<int>(count); ++i) minima_.push_back({i, std::nullopt, false});
  }

  void meet(const Saddle& saddle) {
    int older = root(joined_, saddle.one);
    int younger = root(joined_, saddle.other);
    int beyond = saddle.one;
    if (older == younger) return;
    if (draw_.starts_min[younger] < draw_.starts_min[older]) {
      std::swap(older, younger);
      beyond = saddle.other;
    }
    joined_[younger] = older;
    auto& minimum = minima_[younger];
    minimum.prominence = saddle.time - draw_.starts_min[younger];
    minimum.behind_gap = saddle.bridge;
    beyond_[younger] = beyond;
    if (*minimum.prominence < least_) absorbed_[younger] = beyond;
  }

  /// One nucleus ahead of its neighbours whom nobody follows is jitter, not a source.
  void absorb_loners() {
    for (bool again = true; again;) {
      again = false;
      std::vector<int> members(minima_.size(), 0);
      for (const int source : draw_.source) ++members[root(absorbed_, source)];
      for (int i = 0; i < static_cast<int>(minima_.size()); ++i) {
        if (absorbed_[i] != i || members[i] != 1 || beyond_[i] == i) continue;
        absorbed_[i] = beyond_[i];
        again = true;
        break;
      }
    }
  }

  Basins result() const {
    std::vector<int> order;
    for (int i = 0; i < static_cast<int>(minima_.size()); ++i) {
      const bool seen =
          std::find(draw_.source.begin(), draw_.source.end(), i) != draw_.source.end();
      if (seen && absorbed_[i] == i) order.push_back(i);
    }
    std::stable_sort(order.begin(), order.end(),
                     [&](int a, int b) { return draw_.starts_min[a] < draw_.starts_min[b]; });
    Basins basins;
    std::vector<int> position(minima_.size(), -1);
    for (const int one : order) {
      position[one] = static_cast<int>(basins.minima.size());
      basins.minima.push_back(minima_[one]);
    }
    for (const int source : draw_.source) basins.basin.push_back(position[root(absorbed_, source)]);
    return basins;
  }

 private:
  static int root(const std::vector<int>& parent, int one) {
    while (parent[one] != one) one = parent[one];
    return one;
  }

  const SourceDraw& draw_;
  double least_;
  std::vector<int> joined_, absorbed_, beyond_;
  std::vector<Minimum> minima_;
};

}  // namespace

Basins find_minima(const SourceDraw& draw, const std::vector<Link>& links,
                   double least_prominence_min) {
  Merging merging(draw, least_prominence_min);
  for (const auto& saddle : saddles_of(draw, links)) merging.meet(saddle);
  merging.absorb_loners();
  return merging.result();
}

}  // namespace wavefount
