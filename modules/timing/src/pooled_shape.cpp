#include "wavefount/timing/pooled_shape.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <map>
#include <numeric>

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
// A lattice step that changes the log evidence by this much or less is small enough to average
// over.
constexpr double small_change = 1;
constexpr double least_weight = 0.005;
constexpr std::size_t most_shapes = 16;

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

class Search {
 public:
  Search(std::vector<const FallWindow*> windows, const Surroundings& surroundings)
      : windows_(std::move(windows)), surroundings_(surroundings) {}

  PooledShape run() {
    std::vector<Node> coarse;
    for (int kind = 0; kind < 2; ++kind)
      for (int d = 0; d <= diffusion_steps; d += coarse_step)
        for (int p = 0; p <= permeabilisation_steps; p += coarse_step)
          coarse.push_back({kind, d, p});
    best_.assign(windows_.size(), -INFINITY);
    for (const auto& node : coarse) {
      const auto& own = evidence(node);
      for (std::size_t i = 0; i < own.size(); ++i) best_[i] = std::max(best_[i], own[i]);
    }
    std::map<Node, double> posterior;
    for (int kind = 0; kind < 2; ++kind) spread_around(climb(best_of(coarse, kind)), posterior);
    return normalised(posterior);
  }

 private:
  const std::vector<double>& evidence(const Node& node) {
    const auto known = cache_.find(node);
    if (known != cache_.end()) return known->second;
    std::vector<double> values;
    for (const auto* window : windows_)
      values.push_back(onset_likelihood(*window, curve_for(*window, shape_of(node), surroundings_))
                           .log_evidence());
    return cache_[node] = std::move(values);
  }

  double score(const Node& node) {
    if (!on_lattice(node)) return -INFINITY;
    const auto& own = evidence(node);
    double sum = 0;
    for (std::size_t i = 0; i < own.size(); ++i) sum += std::max(own[i] - best_[i], -highest_say);
    return sum;
  }

  Node best_of(const std::vector<Node>& nodes, int kind) {
    Node best;
    double highest = -INFINITY;
    for (const auto& node : nodes)
      if (node.kind == kind && score(node) > highest) {
        highest = score(node);
        best = node;
      }
    return best;
  }

  // Pattern search (Hooke & Jeeves 1961) with the diagonals, along which the two trade off.
  Node climb(Node node) {
    constexpr std::array<std::array<int, 2>, 8> moves{
        {{1, 0}, {-1, 0}, {0, 1}, {0, -1}, {1, 1}, {-1, -1}, {1, -1}, {-1, 1}}};
    for (int step = coarse_step / 2; step >= 1; step /= 2)
      for (bool moved = true; moved;) {
        moved = false;
        Node better = node;
        for (const auto& move : moves) {
          const Node trial{node.kind, node.diffusion + move[0] * step,
                           node.permeabilisation + move[1] * step};
          if (score(trial) > score(better)) better = trial;
        }
        if (better != node) {
          node = better;
          moved = true;
        }
      }
    return node;
  }

  // The step along one axis over which the evidence changes little.
  int step_along(const Node& node, int diffusion, int permeabilisation) {
    int step = 1;
    for (; step < coarse_step; step *= 2) {
      double change = INFINITY;
      for (const int side : {-2 * step, 2 * step}) {
        const double there = score({node.kind, node.diffusion + diffusion * side,
                                    node.permeabilisation + permeabilisation * side});
        if (std::isfinite(there)) change = std::min(change, score(node) - there);
      }
      if (change > small_change) break;
    }
    return step;
  }

  void spread_around(const Node& node, std::map<Node, double>& posterior) {
    const int along = step_along(node, 1, 0), across = step_along(node, 0, 1);
    for (int d = -2; d <= 2; ++d)
      for (int p = -2; p <= 2; ++p) {
        const Node near{node.kind, node.diffusion + d * along, node.permeabilisation + p * across};
        if (on_lattice(near)) posterior[near] = score(near) + std::log(along * across);
      }
  }

  static PooledShape normalised(const std::map<Node, double>& posterior) {
    double highest = -INFINITY;
    for (const auto& [node, value] : posterior) highest = std::max(highest, value);
    PooledShape pooled;
    for (const auto& [node, value] : posterior)
      if (std::exp(value - highest) >= least_weight)
        pooled.shapes.push_back({shape_of(node), std::exp(value - highest)});
    std::stable_sort(pooled.shapes.begin(), pooled.shapes.end(),
                     [](const auto& a, const auto& b) { return a.weight > b.weight; });
    if (pooled.shapes.size() > most_shapes) pooled.shapes.resize(most_shapes);
    double sum = 0;
    for (const auto& one : pooled.shapes) sum += one.weight;
    for (auto& one : pooled.shapes) one.weight /= sum;
    return pooled;
  }

  std::vector<const FallWindow*> windows_;
  Surroundings surroundings_;
  std::map<Node, std::vector<double>> cache_;
  std::vector<double> best_;
};

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

PooledShape pool_shape(const std::vector<FallWindow>& windows, const Surroundings& surroundings,
                       int most_falls) {
  if (windows.empty())
    return {{{shape_of({0, diffusion_steps / 2, permeabilisation_steps / 2}), 1.0}}};
  return Search(clearest(windows, most_falls), surroundings).run();
}

}  // namespace wavefount
