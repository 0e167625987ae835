#include "wavefount/waves/fronts.h"

#include <algorithm>
#include <cmath>

namespace wavefount {
namespace {

constexpr double normal_quantile_95 = 1.959963984540054;

/// Fitted line of an arm: time at its first nucleus, slowness from there on.
struct Line {
  double start_min = 0;
  double slope = 0, slope_se = 0;
};

double distance(Point a, Point b) {
  return std::hypot(a.x - b.x, a.y - b.y);
}

/// Weighted regression of time on the way along the tube.
Line regress(const std::vector<int>& arm, double from_um, const FrontView& view) {
  double weight = 0, mean_r = 0, mean_t = 0;
  const auto weight_of = [&](int i) {
    const double se = view.arrivals->se_min[i];
    return 1 / std::max(view.fit->jitter_min * view.fit->jitter_min + se * se, 1e-12);
  };
  const auto way_of = [&](int i) { return std::abs(view.arrivals->places_um[i].x - from_um); };
  for (const int i : arm) {
    weight += weight_of(i);
    mean_r += weight_of(i) * way_of(i);
    mean_t += weight_of(i) * view.arrivals->times_min[i];
  }
  mean_r /= weight;
  mean_t /= weight;
  double square = 0, product = 0;
  for (const int i : arm) {
    square += weight_of(i) * (way_of(i) - mean_r) * (way_of(i) - mean_r);
    product += weight_of(i) * (way_of(i) - mean_r) * (view.arrivals->times_min[i] - mean_t);
  }
  return {mean_t - product / square * mean_r, product / square, 1 / std::sqrt(square)};
}

/// The same from the drawn fields, between the arm's first and last nucleus.
Line drawn_line(int first, int last, const FrontView& view) {
  const auto& draws = view.fit->draws;
  const auto count = static_cast<double>(draws.size());
  const double way = std::abs(view.arrivals->places_um[last].x - view.arrivals->places_um[first].x);
  const auto slope_of = [&](const SourceDraw& draw) {
    return std::abs(draw.depth_min[last] - draw.depth_min[first]) / way;
  };
  Line line;
  for (const auto& draw : draws) {
    line.start_min += draw.field_min[first] / count;
    line.slope += slope_of(draw) / count;
  }
  double square = 0;
  for (const auto& draw : draws)
    square += (slope_of(draw) - line.slope) * (slope_of(draw) - line.slope) / count;
  line.slope_se = std::sqrt(square);
  return line;
}

/// One basin with its source.
class BasinFronts {
 public:
  BasinFronts(const Source& source, int number, const FrontView& view)
      : source_(source), view_(view) {
    for (int i = 0; i < static_cast<int>(view.basin.size()); ++i)
      if (view.basin[i] == number && view.fit->astray[i] == 0) members_.push_back(i);
  }

  void add_to(std::vector<Front>& fronts) const {
    for (const int side : {-1, 1}) {
      if (source_.side == side) continue;  // what comes in over an edge moves away from it
      std::vector<int> arm;
      for (const int member : members_) {
        const double off = view_.arrivals->places_um[member].x - source_.place_um.x;
        if (source_.side != 0 || off * side > 0) arm.push_back(member);
      }
      add_arm(arm, side, fronts);
    }
  }

 private:
  /// The collision lies about half way to the nearest nucleus of the other basin.
  bool near_collision(int member, double share) const {
    const Point place = view_.arrivals->places_um[member];
    for (std::size_t i = 0; i < view_.basin.size(); ++i) {
      if (view_.basin[i] == view_.basin[member] || view_.basin[i] < 0) continue;
      const auto& around = view_.neighbours[i];
      const bool linked = std::any_of(around.begin(), around.end(), [&](int near) {
        return view_.basin[near] == view_.basin[member];
      });
      if (linked && distance(place, view_.arrivals->places_um[i]) < 2 * share * view_.spacing_um)
        return true;
    }
    return false;
  }

  std::vector<int> clear_of_ends(const std::vector<int>& arm, double share) const {
    std::vector<int> clear;
    for (const int member : arm) {
      const bool at_source =
          source_.side == 0 &&
          distance(view_.arrivals->places_um[member], source_.place_um) < share * view_.spacing_um;
      if (!at_source && !near_collision(member, share)) clear.push_back(member);
    }
    return clear;
  }

  void add_arm(const std::vector<int>& arm, int side, std::vector<Front>& fronts) const {
    constexpr std::size_t enough = 3;
    for (const double share : {1.0, 0.5, 0.0}) {
      const auto clear = clear_of_ends(arm, share);
      if (clear.size() < enough && share > 0) continue;
      return add_front(clear, side, fronts);
    }
  }

  void add_front(const std::vector<int>& arm, int side, std::vector<Front>& fronts) const {
    if (arm.size() < 2) return;
    const auto& places = view_.arrivals->places_um;
    const auto [low, high] = std::minmax_element(
        arm.begin(), arm.end(), [&](int a, int b) { return places[a].x < places[b].x; });
    const int first = side > 0 ? *low : *high;
    const int last = side > 0 ? *high : *low;
    const double way = std::abs(places[last].x - places[first].x);
    if (way < 0.5 * view_.spacing_um) return;
    const bool drawn = !view_.fit->draws.empty();
    const auto line = drawn ? drawn_line(first, last, view_) : regress(arm, places[first].x, view_);
    Front front;
    front.origin = source_.origin;
    front.direction = side < 0 ? "left" : "right";
    front.from_um = places[first].x;
    front.to_um = places[last].x;
    front.from_min = line.start_min;
    front.to_min = line.start_min + line.slope * way;
    front.nuclei = static_cast<int>(arm.size());
    front.slowness = slowness_with_speed(line.slope, line.slope_se);
    fronts.push_back(front);
  }

  Source source_;
  const FrontView& view_;
  std::vector<int> members_;
};

}  // namespace

Slowness slowness_with_speed(double min_per_um, double se_min_per_um) {
  Slowness slowness{min_per_um, se_min_per_um, std::nullopt, std::nullopt, std::nullopt};
  const double low = min_per_um - normal_quantile_95 * se_min_per_um;
  const double high = min_per_um + normal_quantile_95 * se_min_per_um;
  if (high > 0) slowness.speed_lo_um_per_min = 1 / high;
  if (low > 0) {
    slowness.speed_um_per_min = 1 / min_per_um;
    slowness.speed_hi_um_per_min = 1 / low;
  }
  return slowness;
}

std::vector<Front> measure_fronts(const std::vector<Source>& sources, const FrontView& view) {
  std::vector<Front> fronts;
  for (int i = 0; i < static_cast<int>(sources.size()); ++i)
    BasinFronts(sources[i], i, view).add_to(fronts);
  return fronts;
}

std::optional<Slowness> mean_slowness(const std::vector<Front>& fronts) {
  double weight = 0, sum = 0;
  for (const auto& front : fronts) {
    const double se = front.slowness.se_min_per_um;
    if (!(se > 0)) continue;
    weight += 1 / (se * se);
    sum += front.slowness.min_per_um / (se * se);
  }
  if (weight <= 0) return std::nullopt;
  return slowness_with_speed(sum / weight, 1 / std::sqrt(weight));
}

}  // namespace wavefount
