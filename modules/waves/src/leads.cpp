#include "wavefount/waves/leads.h"

#include <algorithm>
#include <cmath>

#include "wavefount/waves/counter_random.h"

namespace wavefount {
namespace {

constexpr int draws = 1000;
constexpr double certain = 0.9;
constexpr std::size_t least_for_neighbours = 5;  // fewer: `too-few`, compared with all others

struct OrderShares {
  double first = 0, last = 0;
};

/// Some other is earlier, and some other later, beyond what any drawn error could turn.
bool plainly_between(const WaveEntry& own, const std::vector<int>& others,
                     const WaveEntries& entries) {
  constexpr double beyond = 7;  // standard errors
  bool after = false, before = false;
  for (const int at : others) {
    const auto& other = entries.entries[at];
    const double margin = beyond * std::hypot(own.se_min, other.se_min);
    after = after || other.time_min < own.time_min - margin;
    before = before || other.time_min > own.time_min + margin;
  }
  return after && before;
}

/// How often an entry comes before, or after, all of some others when all times are drawn anew
/// within their errors. Jitter is not drawn: it is the nuclei's own.
OrderShares order_among(int entry, const std::vector<int>& others, const WaveEntries& entries,
                        const CounterRandom& random) {
  OrderShares shares;
  if (plainly_between(entries.entries[entry], others, entries)) return shares;
  const auto drawn = [&](int which, int draw) {
    const auto& one = entries.entries[which];
    return one.time_min + one.se_min * random.normal(static_cast<std::uint64_t>(which),
                                                     static_cast<std::uint64_t>(draw));
  };
  for (int draw = 0; draw < draws; ++draw) {
    const double own = drawn(entry, draw);
    bool first = true, last = true;
    for (const int other : others) {
      const double time = drawn(other, draw);
      first = first && own < time;
      last = last && own > time;
    }
    shares.first += first ? 1.0 / draws : 0;
    shares.last += last ? 1.0 / draws : 0;
  }
  return shares;
}

void set_delay(WaveEntry& own, const WaveEntries& entries) {
  double weight = 0, time = 0, variance = 0;
  for (const int at : own.neighbours) {
    const auto& near = entries.entries[at];
    const double w = 1 / std::max(std::hypot(near.x_um - own.x_um, near.y_um - own.y_um), 1.0);
    weight += w;
    time += w * near.time_min;
    variance += w * w * near.se_min * near.se_min;
  }
  own.neighbour_delay_min = own.time_min - time / weight;
  own.neighbour_delay_se_min = std::sqrt(own.se_min * own.se_min + variance / (weight * weight));
}

/// Whether neighbours lie on both sides along the tube.
bool surrounded(const WaveEntry& own, const WaveEntries& entries) {
  bool left = false, right = false;
  for (const int at : own.neighbours) {
    left = left || entries.entries[at].along_um < own.along_um;
    right = right || entries.entries[at].along_um > own.along_um;
  }
  return left && right;
}

Timing timing_of(const WaveEntry& own, const WaveEntries& entries, bool astray,
                 const OrderShares& shares) {
  if (own.neighbours.empty()) return Timing::alone;
  if (astray) return Timing::out_of_step;
  if (shares.first >= certain) return Timing::leads;
  if (shares.last >= certain && surrounded(own, entries)) return Timing::lags;
  return Timing::with_front;
}

std::vector<int> others_of(const Wave& wave, int entry) {
  std::vector<int> others;
  for (const int one : wave.entries)
    if (one != entry) others.push_back(one);
  return others;
}

}  // namespace

void time_among_neighbours(const Wave& wave, WaveEntries& entries, const std::vector<char>& astray,
                           std::uint64_t seed) {
  const CounterRandom random(seed);
  const bool few = wave.entries.size() < least_for_neighbours;
  for (std::size_t i = 0; i < wave.entries.size(); ++i) {
    auto& own = entries.entries[wave.entries[i]];
    const bool strays = i < astray.size() && astray[i] != 0;
    if (!own.neighbours.empty()) set_delay(own, entries);
    const auto others = few ? others_of(wave, wave.entries[i]) : own.neighbours;
    OrderShares shares;
    if (!others.empty()) {
      shares = order_among(wave.entries[i], others, entries, random);
      own.lead_probability = shares.first;
    }
    own.timing = timing_of(own, entries, strays, shares);
  }
}

std::vector<double> first_probabilities(const Wave& wave, const WaveEntries& entries,
                                        std::uint64_t seed) {
  const CounterRandom random(seed);
  std::vector<double> shares;
  for (const int entry : wave.entries)
    shares.push_back(order_among(entry, others_of(wave, entry), entries, random).first);
  return shares;
}

}  // namespace wavefount
