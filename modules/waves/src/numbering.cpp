#include "wavefount/waves/numbering.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>
#include <numeric>
#include <utility>

#include "wavefount/core/robust.h"

namespace wavefount {
namespace {

/// Entry `b` should be numbered `step` above entry `a`.
struct Vote {
  int a = 0, b = 0, step = 0;
  double weight = 0;
};

/// Sums over neighbours for a gradient of time in space.
struct GradientSums {
  double xx = 0, xy = 0, yy = 0, xt = 0, yt = 0;
};

/// The one that gathers votes and numbers.
class Unwrapping {
 public:
  Unwrapping(const std::vector<WaveEntry>& entries, const Chronology& chronology)
      : entries_(entries), chronology_(chronology), number_(entries.size(), 0) {
    for (const auto& station : chronology.stations) add_successions(station);
    own_votes_ = votes_.size();
    gather_neighbours();
  }

  std::vector<int> solve() {
    number_by_tree();
    improve();
    constexpr int looks = 2;
    for (int look = 0; look < looks; ++look) {
      expect_differences();
      gather_neighbours();
      improve();
    }
    align_parts();
    drop_repeats();
    count_from_one();
    return number_;
  }

 private:
  double period_between(int a, int b) const {
    return chronology_.period.at((entries_[a].time_min + entries_[b].time_min) / 2);
  }

  void improve() {
    constexpr int most_sweeps = 30;
    for (int sweep = 0; sweep < most_sweeps; ++sweep) {
      const bool stations_moved = improve_stations();
      const bool sides_moved = improve_sides();
      if (!stations_moved && !sides_moved) break;
    }
  }

  void vote(int a, int b, int least_step, double share, double expected_min = 0) {
    const double periods =
        (entries_[b].time_min - entries_[a].time_min - expected_min) / period_between(a, b);
    const int step = std::max(static_cast<int>(std::lround(periods)), least_step);
    const double certainty = 1 - 2 * std::abs(periods - step);
    if (certainty <= 0) return;
    votes_.push_back({a, b, step, share * certainty / (1 + std::abs(step))});
  }

  void add_successions(const Station& station) {
    // The same nucleus is its own best neighbour; over one entry more (which may be one too many)
    // it still knows about as much as a neighbour.
    constexpr double next_share = 4;
    constexpr double next_but_one_share = 1.5;
    const auto& own = station.entries;
    for (std::size_t i = 0; i + 1 < own.size(); ++i) {
      vote(own[i], own[i + 1], 1, next_share);
      if (i + 2 < own.size()) vote(own[i], own[i + 2], 1, next_but_one_share);
    }
  }

  int nearest_in_time(const Station& station, double time_min) const {
    return *std::min_element(station.entries.begin(), station.entries.end(), [&](int a, int b) {
      return std::abs(entries_[a].time_min - time_min) < std::abs(entries_[b].time_min - time_min);
    });
  }

  void add_neighbours(const Link& link) {
    const auto& from = chronology_.stations[link.a];
    const auto& to = chronology_.stations[link.b];
    const double share = chronology_.spacing_um / std::max(link.length_um, chronology_.spacing_um);
    for (const int a : from.entries) {
      const int b = nearest_in_time(to, entries_[a].time_min);
      if (nearest_in_time(from, entries_[b].time_min) == a)
        vote(a, b, -1, share, expected_difference(a, b));
    }
  }

  void gather_neighbours() {
    votes_.resize(own_votes_);
    for (const auto& link : chronology_.graph.links) add_neighbours(link);
    touching_.assign(entries_.size(), {});
    for (int i = 0; i < static_cast<int>(votes_.size()); ++i) {
      touching_[votes_[i].a].push_back(i);
      touching_[votes_[i].b].push_back(i);
    }
  }

  /// Over a long link a front may need more than half a period; what it needed on both sides of
  /// the link, where links are short, tells. Gradients from the numbers found so far, by least
  /// squares over the neighbours with the same number; directions without neighbours stay flat.
  void expect_differences() {
    gradients_.assign(entries_.size(), {});
    for (const auto& one : votes_) {
      if (number_[one.a] != number_[one.b]) continue;
      add_to(gradients_[one.a], one.a, one.b, 1);
      add_to(gradients_[one.b], one.b, one.a, 1);
    }
  }

  void add_to(GradientSums& sums, int own, int near, double sign) const {
    const double dx = entries_[near].x_um - entries_[own].x_um;
    const double dy = entries_[near].y_um - entries_[own].y_um;
    const double dt = entries_[near].time_min - entries_[own].time_min;
    sums.xx += sign * dx * dx;
    sums.xy += sign * dx * dy;
    sums.yy += sign * dy * dy;
    sums.xt += sign * dx * dt;
    sums.yt += sign * dy * dt;
  }

  /// Expected time over a way, from an entry's neighbours less one.
  double expected_over(int own, int but, double dx, double dy) const {
    auto sums = gradients_[own];
    if (number_[own] == number_[but]) add_to(sums, own, but, -1);
    const double ridge = 0.1 * chronology_.spacing_um * chronology_.spacing_um;
    const double xx = sums.xx + ridge;
    const double yy = sums.yy + ridge;
    const double determinant = xx * yy - sums.xy * sums.xy;
    if (determinant <= 0) return 0;
    return ((sums.xt * yy - sums.yt * sums.xy) * dx + (sums.yt * xx - sums.xt * sums.xy) * dy) /
           determinant;
  }

  double expected_difference(int a, int b) const {
    if (gradients_.empty()) return 0;
    const double dx = entries_[b].x_um - entries_[a].x_um;
    const double dy = entries_[b].y_um - entries_[a].y_um;
    const double from_a = expected_over(a, b, dx, dy);
    const double from_b = expected_over(b, a, dx, dy);
    // Opposite signs: a front starts or two collide in between.
    if (from_a * from_b <= 0) return 0;
    return std::copysign(std::min(std::abs(from_a), std::abs(from_b)), from_a);
  }

  void number_by_tree() {
    std::vector<int> order(votes_.size());
    std::iota(order.begin(), order.end(), 0);
    std::stable_sort(order.begin(), order.end(),
                     [&](int a, int b) { return votes_[a].weight > votes_[b].weight; });
    std::vector<std::vector<int>> members(entries_.size());
    part_.resize(entries_.size());
    std::iota(part_.begin(), part_.end(), 0);
    for (int i = 0; i < static_cast<int>(entries_.size()); ++i) members[i] = {i};
    for (const int at : order) {
      const auto& one = votes_[at];
      int keep = part_[one.a];
      int join = part_[one.b];
      if (keep == join) continue;
      int shift = number_[one.a] + one.step - number_[one.b];
      if (members[keep].size() < members[join].size()) {
        std::swap(keep, join);
        shift = -shift;
      }
      for (const int member : members[join]) {
        number_[member] += shift;
        part_[member] = keep;
        members[keep].push_back(member);
      }
      members[join].clear();
    }
  }

  bool satisfied(const Vote& one, int shift_a, int shift_b) const {
    return number_[one.b] + shift_b - number_[one.a] - shift_a == one.step;
  }

  /// What shifting the chosen entries (chosen_ = 1) by `shift` wins in satisfied weight.
  double gain(const std::vector<int>& members, int shift) const {
    double won = 0;
    for (const int member : members) {
      for (const int at : touching_[member]) {
        const auto& one = votes_[at];
        const int shift_a = chosen_[one.a] ? shift : 0;
        const int shift_b = chosen_[one.b] ? shift : 0;
        if (shift_a == shift_b) continue;
        won += one.weight * (satisfied(one, shift_a, shift_b) - satisfied(one, 0, 0));
      }
    }
    return won;
  }

  bool try_shift(const std::vector<int>& members) {
    chosen_.resize(entries_.size(), 0);
    for (const int member : members) chosen_[member] = 1;
    constexpr double least_gain = 1e-9;
    int best_shift = 0;
    double best_gain = least_gain;
    for (const int shift : {-2, -1, 1, 2}) {
      if (const double won = gain(members, shift); won > best_gain) {
        best_gain = won;
        best_shift = shift;
      }
    }
    for (const int member : members) {
      chosen_[member] = 0;
      number_[member] += best_shift;
    }
    return best_shift != 0;
  }

  bool improve_stations() {
    bool moved = false;
    for (const auto& station : chronology_.stations) {
      const auto& own = station.entries;
      for (auto at = own.begin(); at != own.end(); ++at) {
        moved |= try_shift({at, own.end()});
        moved |= try_shift({own.begin(), at + 1});
        moved |= try_shift({*at});
      }
    }
    return moved;
  }

  /// A weak link in a chain of nuclei can put all that lies behind it one off.
  bool improve_sides() {
    const auto tree = spanning_links();
    bool moved = false;
    for (std::size_t cut = 0; cut < tree.size(); ++cut) {
      auto rest = tree;
      rest.erase(rest.begin() + static_cast<std::ptrdiff_t>(cut));
      const auto side = connected_parts(chronology_.stations.size(), rest);
      std::vector<int> members;
      for (std::size_t i = 0; i < side.size(); ++i) {
        if (side[i] != side[tree[cut].b]) continue;
        const auto& own = chronology_.stations[i].entries;
        members.insert(members.end(), own.begin(), own.end());
      }
      moved |= try_shift(members);
      moved |= try_later_halves(members);
    }
    return moved;
  }

  /// The same from some number on only: where a missing entry was not noticed at one link.
  bool try_later_halves(const std::vector<int>& members) {
    std::vector<int> numbers;
    for (const int member : members) numbers.push_back(number_[member]);
    std::sort(numbers.begin(), numbers.end());
    numbers.erase(std::unique(numbers.begin(), numbers.end()), numbers.end());
    bool moved = false;
    for (const int from : numbers) {
      std::vector<int> later;
      for (const int member : members) {
        if (number_[member] >= from) later.push_back(member);
      }
      moved |= try_shift(later);
    }
    return moved;
  }

  std::vector<Link> spanning_links() const {
    constexpr std::size_t most_stations = 250;  // beyond, loops are many and single votes weak
    std::vector<Link> tree;
    if (chronology_.stations.size() > most_stations) return tree;
    auto links = chronology_.graph.links;
    std::stable_sort(links.begin(), links.end(), [](const Link& left, const Link& right) {
      return left.length_um < right.length_um;
    });
    for (const auto& link : links) {
      const auto part = connected_parts(chronology_.stations.size(), tree);
      if (part[link.a] != part[link.b]) tree.push_back(link);
    }
    return tree;
  }

  /// Parts without any vote between them share numbers by time alone.
  void align_parts() {
    std::map<int, std::vector<int>> parts;
    for (int i = 0; i < static_cast<int>(entries_.size()); ++i) parts[part_[i]].push_back(i);
    const auto largest =
        std::max_element(parts.begin(), parts.end(), [](const auto& left, const auto& right) {
          return left.second.size() < right.second.size();
        });
    if (largest == parts.end()) return;
    for (const auto& [part, members] : parts) {
      if (part == largest->first) continue;
      std::vector<double> shifts;
      for (const int member : members) {
        const int near =
            *std::min_element(largest->second.begin(), largest->second.end(), [&](int a, int b) {
              return std::abs(entries_[a].time_min - entries_[member].time_min) <
                     std::abs(entries_[b].time_min - entries_[member].time_min);
            });
        const double periods =
            (entries_[member].time_min - entries_[near].time_min) / period_between(near, member);
        shifts.push_back(number_[near] + std::round(periods) - number_[member]);
      }
      const int shift = static_cast<int>(std::lround(median(std::move(shifts))));
      for (const int member : members) number_[member] += shift;
    }
  }

  double support(int entry) const {
    double sum = 0;
    for (const int at : touching_[entry]) {
      if (satisfied(votes_[at], 0, 0)) sum += votes_[at].weight;
    }
    return sum;
  }

  void drop_repeats() {
    dropped_.assign(entries_.size(), 0);
    for (const auto& station : chronology_.stations) {
      int kept = -1;
      for (const int entry : station.entries) {
        if (kept >= 0 && number_[entry] <= number_[kept]) {
          const int weaker = support(entry) > support(kept) ? kept : entry;
          dropped_[weaker] = 1;
          if (weaker == entry) continue;
        }
        kept = entry;
      }
    }
  }

  /// The first number that is no loner becomes 1.
  void count_from_one() {
    std::map<int, int> members;
    for (std::size_t i = 0; i < entries_.size(); ++i) {
      if (!dropped_[i]) ++members[number_[i]];
    }
    if (members.empty()) return;
    int first = members.begin()->first;
    for (const auto& [number, count] : members) {
      if (count < 2) continue;
      first = number;
      break;
    }
    for (std::size_t i = 0; i < entries_.size(); ++i)
      number_[i] = dropped_[i] ? 0 : std::max(number_[i] - first + 1, 0);
  }

  const std::vector<WaveEntry>& entries_;
  const Chronology& chronology_;
  std::vector<int> number_, part_, dropped_;
  std::vector<char> chosen_;
  std::vector<Vote> votes_;
  std::size_t own_votes_ = 0;  // successions come first
  std::vector<GradientSums> gradients_;
  std::vector<std::vector<int>> touching_;
};

}  // namespace

std::vector<int> cycle_numbers(const std::vector<WaveEntry>& entries,
                               const Chronology& chronology) {
  // Without any period every nucleus entered once: one mitosis.
  if (!chronology.period.known()) return std::vector<int>(entries.size(), 1);
  return Unwrapping(entries, chronology).solve();
}

}  // namespace wavefount
