#include "wavefount/waves/fronts.h"

#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <limits>

namespace wavefount {
namespace {

constexpr double normal_quantile_95 = 1.959963984540054;

struct Line {
  double level_min = 0;  ///< at distance zero
  double slope = 0, slope_se = 0;
  double dispersion = 1;  ///< residual variance over the expected one
  double free = 0;        ///< degrees of freedom
};

double distance(Point a, Point b) {
  return std::hypot(a.x - b.x, a.y - b.y);
}

double variance_of(const FrontView& view, int arrival) {
  const double se = view.arrivals->se_min[arrival];
  return std::max(view.jitter_min * view.jitter_min + se * se, 1e-12);
}

/// Weighted regression of time on distance.
std::optional<Line> regress(const std::vector<int>& members, const std::vector<double>& distances,
                            const FrontView& view) {
  double weight = 0, mean_r = 0, mean_t = 0;
  for (std::size_t i = 0; i < members.size(); ++i) {
    const double w = 1 / variance_of(view, members[i]);
    weight += w;
    mean_r += w * distances[i];
    mean_t += w * view.arrivals->times_min[members[i]];
  }
  if (members.size() < 2) return std::nullopt;
  mean_r /= weight;
  mean_t /= weight;
  double square = 0, product = 0;
  for (std::size_t i = 0; i < members.size(); ++i) {
    const double w = 1 / variance_of(view, members[i]);
    square += w * (distances[i] - mean_r) * (distances[i] - mean_r);
    product += w * (distances[i] - mean_r) * (view.arrivals->times_min[members[i]] - mean_t);
  }
  if (square <= 0) return std::nullopt;
  Line line;
  line.slope = product / square;
  line.slope_se = 1 / std::sqrt(square);
  line.level_min = mean_t - line.slope * mean_r;
  line.free = static_cast<double>(members.size()) - 2;
  double misfit = 0;
  for (std::size_t i = 0; i < members.size(); ++i) {
    const double off =
        view.arrivals->times_min[members[i]] - line.level_min - line.slope * distances[i];
    misfit += off * off / variance_of(view, members[i]);
  }
  if (line.free > 0) line.dispersion = misfit / line.free;
  return line;
}

/// Cone over a basin: time = level + slope · distance from the apex.
struct Cone {
  Point apex;
  double slope_variance_ratio = 1;  ///< of the slope with the apex free over with it known
};

struct ConeStep {
  Eigen::Matrix4d information = Eigen::Matrix4d::Zero();
  Eigen::Vector4d pull = Eigen::Vector4d::Zero();
  double misfit = 0;
};

ConeStep cone_step(const std::vector<int>& members, const FrontView& view,
                   const Eigen::Vector4d& cone) {
  ConeStep step;
  for (const int member : members) {
    const Point place = view.arrivals->places_um[member];
    const double dx = cone(2) - place.x;
    const double dy = cone(3) - place.y;
    const double r = std::max(std::hypot(dx, dy), 1e-6);
    const double off = view.arrivals->times_min[member] - cone(0) - cone(1) * r;
    const Eigen::Vector4d gradient(1, r, cone(1) * dx / r, cone(1) * dy / r);
    const double w = 1 / variance_of(view, member);
    step.information += w * gradient * gradient.transpose();
    step.pull += w * off * gradient;
    step.misfit += w * off * off;
  }
  return step;
}

/// Gauss–Newton with damping (Marquardt 1963), the apex held loosely near the source: it may lie
/// outside the tube, where fronts that come off a whole wall or from outside have it.
Cone fit_cone(const std::vector<int>& members, const FrontView& view, Point source,
              double first_slope, double level) {
  constexpr int most_steps = 60;
  constexpr double reach_spacings = 30;
  const double reach = reach_spacings * view.spacing_um;
  Eigen::Vector4d cone(level, first_slope, source.x + 0.01 * view.spacing_um, source.y);
  const auto with_prior = [&](ConeStep step, const Eigen::Vector4d& at) {
    for (int i : {2, 3}) {
      const double off = (i == 2 ? source.x : source.y) - at(i);
      step.information(i, i) += 1 / (reach * reach);
      step.pull(i) += off / (reach * reach);
      step.misfit += off * off / (reach * reach);
    }
    return step;
  };
  double damping = 1e-3;
  auto current = with_prior(cone_step(members, view, cone), cone);
  for (int i = 0; i < most_steps && damping < 1e10; ++i) {
    Eigen::Matrix4d damped = current.information;
    damped.diagonal() *= 1 + damping;
    const Eigen::Vector4d moved = cone + damped.ldlt().solve(current.pull);
    const auto next = with_prior(cone_step(members, view, moved), moved);
    if (!(next.misfit < current.misfit)) {
      damping *= 10;
      continue;
    }
    const bool settled = current.misfit - next.misfit < 1e-6;
    cone = moved;
    current = next;
    damping = std::max(damping / 10, 1e-9);
    if (settled) break;
  }
  Cone fitted{{cone(2), cone(3)}, 1};
  const Eigen::Matrix4d covariance = current.information.inverse();
  const Eigen::Matrix2d known_apex = current.information.topLeftCorner<2, 2>().inverse();
  if (known_apex(1, 1) > 0 && covariance(1, 1) > known_apex(1, 1))
    fitted.slope_variance_ratio = covariance(1, 1) / known_apex(1, 1);
  return fitted;
}

/// One basin with its source, and the distances that its arms are measured on.
class BasinFronts {
 public:
  BasinFronts(const Source& source, int number, const FrontView& view)
      : source_(source), view_(view), apex_(source.place_um) {
    for (int i = 0; i < static_cast<int>(view.basin.size()); ++i) {
      if (view.basin[i] == number && !(*view.astray)[i]) members_.push_back(i);
    }
    if (view.wide) find_apex();
  }

  void add_to(std::vector<Front>& fronts) const {
    // The front that comes in over an edge, or off a wall over the whole length, has one arm.
    for (const int side : {-1, 1}) {
      std::vector<int> arm;
      for (const int member : members_) {
        const double off = view_.arrivals->places_um[member].x - source_.place_um.x;
        if ((off >= 0 ? 1 : -1) == side || source_.side != 0) arm.push_back(member);
      }
      if (source_.side != 0 && side == source_.side) continue;
      if (source_.side == 0 && arm.size() > 0 && off_all(arm) == 0) continue;
      add_arm(arm, side, fronts);
    }
  }

 private:
  /// Distance along that an arm spans away from the source; 0 when it is the source alone.
  double off_all(const std::vector<int>& arm) const {
    double most = 0;
    for (const int member : arm)
      most = std::max(most, std::abs(view_.arrivals->places_um[member].x - source_.place_um.x));
    return most;
  }

  double distance_of(int member) const {
    const Point place = view_.arrivals->places_um[member];
    if (view_.wide) return distance(place, apex_);
    if (source_.side != 0) return -source_.side * (place.x - source_.place_um.x);
    return std::abs(place.x - source_.place_um.x);
  }

  void find_apex() {
    constexpr std::size_t least_for_cone = 7;
    if (members_.size() < least_for_cone) return;
    std::vector<double> distances;
    for (const int member : members_) distances.push_back(distance_of(member));
    const auto first = regress(members_, distances, view_);
    if (!first) return;
    const double least_slope = first->slope_se;
    const auto cone = fit_cone(members_, view_, source_.place_um,
                               std::max(first->slope, least_slope), first->level_min);
    if (!std::isfinite(cone.apex.x) || !std::isfinite(cone.apex.y)) return;
    apex_ = cone.apex;
    variance_ratio_ = cone.slope_variance_ratio;
  }

  bool near_collision(int member, double share) const {
    const Point place = view_.arrivals->places_um[member];
    for (std::size_t i = 0; i < view_.basin.size(); ++i) {
      if (view_.basin[i] == view_.basin[member] || view_.basin[i] < 0) continue;
      const auto& around = view_.neighbours[i];
      const bool linked = std::any_of(around.begin(), around.end(), [&](int near) {
        return view_.basin[near] == view_.basin[member];
      });
      // The collision lies about half way to the nearest nucleus of the other basin.
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
      add_front(clear, side, fronts);
      return;
    }
  }

  std::string direction(int side) const { return side < 0 ? "left" : "right"; }

  void add_front(const std::vector<int>& arm, int side, std::vector<Front>& fronts) const {
    std::vector<double> distances;
    for (const int member : arm) distances.push_back(distance_of(member));
    const auto line = regress(arm, distances, view_);
    if (!line) return;
    const auto [low, high] = std::minmax_element(distances.begin(), distances.end());
    if (*high - *low < 0.5 * view_.spacing_um) return;
    Front front;
    front.origin = source_.origin;
    front.direction = direction(side);
    const int first = arm[low - distances.begin()];
    const int last = arm[high - distances.begin()];
    front.from_um = view_.arrivals->places_um[first].x;
    front.to_um = view_.arrivals->places_um[last].x;
    front.from_min = line->level_min + line->slope * *low;
    front.to_min = line->level_min + line->slope * *high;
    front.nuclei = static_cast<int>(arm.size());
    // The jitter is pooled over the tube's waves; an arm that scatters more than it allows is
    // judged by its own residuals too.
    constexpr double prior_free = 6;
    const double dispersion =
        std::max(1.0, (prior_free + line->free * line->dispersion) / (prior_free + line->free));
    front.slowness =
        slowness_with_speed(line->slope, line->slope_se * std::sqrt(dispersion * variance_ratio_));
    fronts.push_back(front);
  }

  Source source_;
  const FrontView& view_;
  Point apex_;
  double variance_ratio_ = 1;
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
