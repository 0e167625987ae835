#include "wavefount/nuclei/disc_edge.h"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <vector>

namespace wavefount::nuclei {
namespace {

constexpr int table_size = 61;
/// Beyond this blur the profile is as good as Gaussian and a small error of the edge would make a
/// large one of the radius.
constexpr double greatest_blur = 0.6;
constexpr int integration_steps = 200;

/// The blurred profile at distance r: one direction integrated in closed form, the other by the
/// midpoint rule over the chord angle.
double profile(double r, double blur) {
  if (blur <= 0) return r < 1 ? 1.0 : 0.0;
  double sum = 0;
  for (int i = 0; i < integration_steps; ++i) {
    const double angle = std::numbers::pi * ((i + 0.5) / integration_steps - 0.5);
    const double x = std::sin(angle);
    const double half_chord = std::cos(angle);
    const double z = (x - r) / blur;
    sum +=
        std::exp(-0.5 * z * z) * std::erf(half_chord / (blur * std::numbers::sqrt2)) * half_chord;
  }
  return sum * std::numbers::pi / integration_steps / (blur * std::sqrt(2 * std::numbers::pi));
}

/// `inner` depends on the half radius and the other way round; three rounds settle it.
void find_half_radius(DiscEdge& disc) {
  for (int round = 0; round < 3; ++round) {
    disc.inner = profile(0.35 * disc.half_radius, disc.blur);
    double low = 0;
    double high = 2.5;
    for (int i = 0; i < 30; ++i) {
      const double middle = (low + high) / 2;
      (profile(middle, disc.blur) > disc.inner / 2 ? low : high) = middle;
    }
    disc.half_radius = (low + high) / 2;
  }
}

DiscEdge made(double blur) {
  DiscEdge disc;
  disc.blur = blur;
  if (blur < 0.01) return disc;
  find_half_radius(disc);
  const double slope =
      (profile(disc.half_radius - 0.01, blur) - profile(disc.half_radius + 0.01, blur)) / 0.02;
  disc.edge = disc.inner / (std::sqrt(2 * std::numbers::pi) * slope * disc.half_radius);
  double sum = 0;
  constexpr int rings = 60;
  for (int i = 0; i < rings; ++i) {
    const double share = (i + 0.5) / rings;
    sum += profile(disc.half_radius * share, blur) * share;
  }
  disc.mean_inside = 2 * sum / rings;
  return disc;
}

const std::vector<DiscEdge>& table() {
  static const std::vector<DiscEdge> discs = [] {
    std::vector<DiscEdge> made_discs;
    for (int i = 0; i < table_size; ++i)
      made_discs.push_back(made(greatest_blur * i / (table_size - 1)));
    return made_discs;
  }();
  return discs;
}

DiscEdge mixed(const DiscEdge& a, const DiscEdge& b, double share) {
  DiscEdge disc;
  disc.blur = std::lerp(a.blur, b.blur, share);
  disc.half_radius = std::lerp(a.half_radius, b.half_radius, share);
  disc.inner = std::lerp(a.inner, b.inner, share);
  disc.mean_inside = std::lerp(a.mean_inside, b.mean_inside, share);
  disc.edge = std::lerp(a.edge, b.edge, share);
  return disc;
}

}  // namespace

DiscEdge disc_edge(double blur) {
  const double at = std::clamp(blur / greatest_blur, 0.0, 1.0) * (table_size - 1);
  const auto low = std::min(static_cast<std::size_t>(at), std::size_t{table_size - 2});
  return mixed(table()[low], table()[low + 1], at - static_cast<double>(low));
}

DiscEdge disc_with_edge(double edge) {
  const auto& discs = table();
  const double held = std::clamp(edge, 0.0, discs.back().edge);
  const auto above =
      std::lower_bound(discs.begin() + 1, discs.end() - 1, held,
                       [](const DiscEdge& disc, double value) { return disc.edge < value; });
  const DiscEdge& low = *(above - 1);
  const double span = above->edge - low.edge;
  return mixed(low, *above, span > 0 ? std::clamp((held - low.edge) / span, 0.0, 1.0) : 0.0);
}

}  // namespace wavefount::nuclei
