#include "wavefount/waves/order.h"

#include <algorithm>
#include <cmath>
#include <numeric>

#include "wavefount/core/robust.h"
#include "wavefount/waves/counter_random.h"

namespace wavefount {
namespace {

double roughness(const std::vector<double>& times, const std::vector<Link>& links) {
  double sum = 0;
  for (const auto& link : links) {
    const double step = times[link.a] - times[link.b];
    sum += step * step;
  }
  return sum;
}

/// The links among arrivals that take part, renumbered.
std::vector<Link> links_among(const std::vector<int>& kept, std::size_t count,
                              const std::vector<Link>& links) {
  std::vector<int> position(count, -1);
  for (int i = 0; i < static_cast<int>(kept.size()); ++i) position[kept[i]] = i;
  std::vector<Link> among;
  for (auto link : links) {
    link.a = position[link.a];
    link.b = position[link.b];
    if (link.a >= 0 && link.b >= 0) among.push_back(link);
  }
  return among;
}

std::vector<int> kept_of(const std::vector<char>& astray) {
  std::vector<int> kept;
  for (int i = 0; i < static_cast<int>(astray.size()); ++i)
    if (!astray[i]) kept.push_back(i);
  return kept;
}

FlatSlowness regress(const std::vector<double>& places, const std::vector<double>& times,
                     const std::vector<double>& weights) {
  double weight = 0, x = 0, t = 0;
  for (std::size_t i = 0; i < places.size(); ++i) {
    weight += weights[i];
    x += weights[i] * places[i];
    t += weights[i] * times[i];
  }
  double square = 0, product = 0;
  for (std::size_t i = 0; i < places.size(); ++i) {
    const double off = places[i] - x / weight;
    square += weights[i] * off * off;
    product += weights[i] * off * (times[i] - t / weight);
  }
  if (square <= 0) return {};
  return {std::abs(product / square), 1 / std::sqrt(square)};
}

}  // namespace

double order_p_value(const Arrivals& arrivals, const std::vector<char>& astray,
                     const std::vector<Link>& links, int permutations, std::uint64_t seed) {
  const auto kept = kept_of(astray);
  const auto among = links_among(kept, astray.size(), links);
  if (kept.size() < 2 || among.empty()) return 1;
  std::vector<double> times;
  for (const int one : kept) times.push_back(arrivals.times_min[one]);
  constexpr double rounding = 1 + 1e-9;
  const double observed = roughness(times, among) * rounding;
  const CounterRandom random(seed);
  int as_smooth = 0;
  for (int i = 0; i < permutations; ++i) {
    for (int j = static_cast<int>(times.size()) - 1; j > 0; --j)
      std::swap(
          times[j],
          times[random.whole(static_cast<std::uint64_t>(i), static_cast<std::uint64_t>(j), j + 1)]);
    as_smooth += roughness(times, among) <= observed;
  }
  return (1.0 + as_smooth) / (1.0 + permutations);
}

double spread_min(const Arrivals& arrivals) {
  double error = 0;
  for (const double se : arrivals.se_min) error += se * se;
  error /= static_cast<double>(std::max<std::size_t>(arrivals.se_min.size(), 1));
  const double spread = robust_sd(arrivals.times_min);
  return std::sqrt(std::max(spread * spread - error, 0.0));
}

FlatSlowness flat_slowness(const Arrivals& arrivals, const std::vector<char>& astray,
                           double jitter_min) {
  std::vector<double> places, times, weights;
  for (const int i : kept_of(astray)) {
    places.push_back(arrivals.places_um[i].x);
    times.push_back(arrivals.times_min[i]);
    const double se = arrivals.se_min[i];
    weights.push_back(1 / std::max(jitter_min * jitter_min + se * se, 1e-12));
  }
  if (places.empty()) return {};
  const auto through = regress(places, times, weights);
  const auto [low, high] = std::minmax_element(places.begin(), places.end());
  const double middle = (*low + *high) / 2;
  for (double& place : places) place = std::abs(place - middle);
  const auto outwards = regress(places, times, weights);
  const auto reach = [](const FlatSlowness& one) { return one.min_per_um + 2 * one.se_min_per_um; };
  return reach(through) > reach(outwards) ? through : outwards;
}

}  // namespace wavefount
