#include "wavefount/timing/pooled_shape.h"

#include <algorithm>
#include <cmath>
#include <deque>
#include <map>
#include <set>

namespace wavefount {

namespace {

// The lattice of shapes: each step a factor of 2^(1/8). Diffusion of proteins in cytoplasm lies
// between 1 and 100 µm²/s; ten times more stands for mixing by flow, and lets the permeabilisation
// alone shape the fall. Permeabilisation takes from 0.1 s, as good as none, to some minutes.
constexpr double steps_per_octave = 8;
constexpr double least_diffusion = 0.5 * 60;         // µm²/min
constexpr double least_permeabilisation = 0.1 / 60;  // min
constexpr int diffusion_steps = 88;                  // to 1000 µm²/s
constexpr int permeabilisation_steps = 88;           // to 3.4 min
constexpr int coarse_step = 16;
// One fall cannot say more against a shape than this much in log likelihood.
constexpr double highest_say = 12;
// Pores that open at random empty a nucleus exponentially; a constant flow is the exception and has
// to show itself in the film (log of the prior odds).
constexpr double linear_prior = -3;
// Shapes this far below the best in log posterior no longer matter.
constexpr double negligible = 6;
// A posterior that spreads over this many nodes is resolved.
constexpr double enough_nodes = 8;
constexpr int most_shapes = 16;
// Enough falls to find the region of the shape.
constexpr int scout_falls = 12;

struct Node {
  int kind = 0, diffusion = 0, permeabilisation = 0;
  auto operator<=>(const Node&) const = default;
};

ReleaseShape shape_of(const Node& node) {
  ReleaseShape shape;
  shape.kind = node.kind == 0 ? Permeabilisation::exponential : Permeabilisation::linear;
  shape.diffusion_um2_per_min = least_diffusion * std::exp2(node.diffusion / steps_per_octave);
  shape.permeabilisation_min =
      least_permeabilisation * std::exp2(node.permeabilisation / steps_per_octave);
  return shape;
}

bool on_lattice(const Node& node) {
  return node.diffusion >= 0 && node.diffusion <= diffusion_steps && node.permeabilisation >= 0 &&
         node.permeabilisation <= permeabilisation_steps;
}

// The log evidence of shapes in a set of windows.
class Search {
 public:
  Search(std::vector<const FallWindow*> windows, const Surroundings& surroundings)
      : windows_(std::move(windows)),
        surroundings_(surroundings),
        best_(windows_.size(), -INFINITY) {}

  // The best node of a coarse lattice over the whole range.
  Node scout() {
    std::vector<Node> nodes;
    for (int kind = 0; kind < 2; ++kind)
      for (int d = 0; d <= diffusion_steps; d += coarse_step)
        for (int p = 0; p <= permeabilisation_steps; p += coarse_step)
          nodes.push_back({kind, d, p});
    for (const auto& node : nodes) evaluate(node);
    return best_of(nodes);
  }

  // The posterior on the coarsest lattice that resolves it.
  std::map<Node, double> posterior(Node start) {
    std::map<Node, double> weights;
    for (int step = coarse_step; step >= 1; step /= 2) {
      std::set<Node> nodes;
      for (int kind = 0; kind < 2; ++kind)
        flood({kind, start.diffusion, start.permeabilisation}, step, nodes);
      start = best_of({nodes.begin(), nodes.end()});
      weights = normalised({nodes.begin(), nodes.end()});
      if (effective_number(weights) >= enough_nodes) break;
    }
    return weights;
  }

 private:
  void evaluate(const Node& node) {
    if (!on_lattice(node) || cache_.contains(node)) return;
    auto& values = cache_[node];
    for (std::size_t i = 0; i < windows_.size(); ++i) {
      const auto curve = curve_for(*windows_[i], shape_of(node), surroundings_);
      values.push_back(onset_likelihood(*windows_[i], curve).log_evidence());
      best_[i] = std::max(best_[i], values.back());
    }
  }

  double score(const Node& node) {
    if (!on_lattice(node)) return -INFINITY;
    evaluate(node);
    const auto& own = cache_.at(node);
    double sum = node.kind == 1 ? linear_prior : 0;
    for (std::size_t i = 0; i < own.size(); ++i) sum += std::max(own[i] - best_[i], -highest_say);
    return sum;
  }

  Node best_of(const std::vector<Node>& nodes) {
    return *std::max_element(nodes.begin(), nodes.end(),
                             [this](const Node& a, const Node& b) { return score(a) < score(b); });
  }

  // All nodes of the lattice of that step that hang together with the start and still matter; on
  // the way it climbs, since what matters is measured against the best so far.
  void flood(const Node& start, int step, std::set<Node>& seen) {
    std::deque<Node> open{start};
    seen.insert(start);
    double highest = score(start);
    while (!open.empty()) {
      const Node node = open.front();
      open.pop_front();
      highest = std::max(highest, score(node));
      if (score(node) < highest - negligible) continue;
      for (int d = -1; d <= 1; ++d)
        for (int p = -1; p <= 1; ++p) {
          const Node near{node.kind, node.diffusion + d * step, node.permeabilisation + p * step};
          if (on_lattice(near) && seen.insert(near).second) open.push_back(near);
        }
    }
  }

  std::map<Node, double> normalised(const std::vector<Node>& nodes) {
    const double highest = score(best_of(nodes));
    std::map<Node, double> weights;
    double sum = 0;
    for (const auto& node : nodes) {
      const double below = score(node) - highest;
      if (below < -negligible) continue;
      sum += weights[node] = std::exp(below);
    }
    for (auto& [node, weight] : weights) weight /= sum;
    return weights;
  }

  static double effective_number(const std::map<Node, double>& weights) {
    double squares = 0;
    for (const auto& [node, weight] : weights) squares += weight * weight;
    return 1 / squares;
  }

  std::vector<const FallWindow*> windows_;
  Surroundings surroundings_;
  std::map<Node, std::vector<double>> cache_;
  std::vector<double> best_;  // of each window over the shapes tried
};

// At most most_shapes of the nodes by systematic sampling, which keeps the spread of the posterior.
PooledShape thinned(const std::map<Node, double>& weights) {
  std::map<Node, double> kept;
  double cumulated = 0;
  int next = 0;
  for (const auto& [node, weight] : weights) {
    cumulated += weight;
    for (; next < most_shapes && (next + 0.5) / most_shapes <= cumulated; ++next)
      kept[node] += 1.0 / most_shapes;
  }
  PooledShape pooled;
  for (const auto& [node, weight] : kept) pooled.shapes.push_back({shape_of(node), weight});
  std::stable_sort(pooled.shapes.begin(), pooled.shapes.end(),
                   [](const auto& a, const auto& b) { return a.weight > b.weight; });
  return pooled;
}

double signal_to_noise(const FallWindow& window) {
  double variance = 0;
  for (const auto& sample : window.samples) variance += sample.variance;
  variance /= static_cast<double>(window.samples.size());
  return std::abs(window.level - window.base) / std::sqrt(variance);
}

std::vector<const FallWindow*> clearest(const std::vector<FallWindow>& windows, int most) {
  std::vector<const FallWindow*> chosen;
  for (const auto& window : windows) chosen.push_back(&window);
  std::stable_sort(chosen.begin(), chosen.end(), [](const auto* a, const auto* b) {
    return signal_to_noise(*a) > signal_to_noise(*b);
  });
  if (static_cast<int>(chosen.size()) > most) chosen.resize(most);
  return chosen;
}

}  // namespace

ReleaseShape scout_shape(const std::vector<FallWindow>& windows, const Surroundings& surroundings) {
  return shape_of(Search(clearest(windows, scout_falls), surroundings).scout());
}

PooledShape pool_shape(const std::vector<FallWindow>& windows, const Surroundings& surroundings,
                       int most_falls) {
  if (windows.empty())
    return {{{shape_of({0, diffusion_steps / 2, permeabilisation_steps / 2}), 1.0}}};
  const Node start = Search(clearest(windows, scout_falls), surroundings).scout();
  return thinned(Search(clearest(windows, most_falls), surroundings).posterior(start));
}

}  // namespace wavefount
