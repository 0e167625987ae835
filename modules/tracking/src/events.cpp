#include "events.h"

#include <algorithm>

#include "wavefount/core/robust.h"

namespace wavefount::tracking {
namespace {

/// Centres nearer than this many sums of radii: outlines that touch, with room for a step's motion.
constexpr double touching = 1.5;
/// Share of one nucleus' light that must be found again in the other.
constexpr double light_share = 0.5;
constexpr int few = 3;

class KinshipFinder {
 public:
  KinshipFinder(const FilmDetections& film, const std::vector<Segment>& segments,
                const std::vector<Chain>& chains)
      : film_(film), chain_of_(film.all.size(), -1) {
    for (std::size_t i = 0; i < chains.size(); ++i) {
      detections_.push_back(detections_of(segments, chains[i]));
      for (const int one : detections_.back()) chain_of_[one] = static_cast<int>(i);
    }
  }

  /// The chain that took up chain `lost` when it ended, or -1.
  int taken_up_by(int lost) const {
    const int last = detections_[lost].back();
    if (film_.all[last].step == film_.steps() - 1) return -1;
    const double own = light(lost, static_cast<int>(detections_[lost].size()), -1);
    return partner(last, own, 1);
  }

  /// The chain that chain `made` broke away from when it started, or -1.
  int broken_from(int made) const {
    const int first = detections_[made].front();
    if (film_.all[first].step == 0) return -1;
    return partner(first, light(made, 0, 1), -1);
  }

 private:
  /// Median integrated light of up to a few detections from position `at` on (direction 1) or
  /// before it (−1).
  double light(int chain, int at, int direction) const {
    const auto& own = detections_[chain];
    std::vector<double> values;
    for (int i = direction > 0 ? at : at - 1;
         i >= 0 && i < static_cast<int>(own.size()) && static_cast<int>(values.size()) < few;
         i += direction)
      values.push_back(film_.all[own[i]].integrated);
    return median(std::move(values));
  }

  /// The nearest chain touching a detection, seen in its step and the one after (`side` 1) or
  /// before (−1), that is brighter on that side by much of `own`.
  int partner(int detection, double own, int side) const {
    const auto& one = film_.all[detection];
    int best = -1;
    double nearest = 0;
    for (int other = film_.first[one.step]; other < film_.first[one.step + 1]; ++other) {
      const int chain = chain_of_[other];
      if (other == detection || chain < 0) continue;
      const double away = distance(one.place_um, film_.all[other].place_um);
      if (away > touching * (one.radius_um + film_.all[other].radius_um)) continue;
      if (best >= 0 && away >= nearest) continue;
      if (gain(chain, other, one.step + side, side) < light_share * own) continue;
      best = chain;
      nearest = away;
    }
    return best;
  }

  /// Light of a chain beyond a step less its light on the other side; none where it was not seen in
  /// step `next`.
  double gain(int chain, int detection, int next, int side) const {
    const auto& own = detections_[chain];
    const auto at =
        static_cast<int>(std::lower_bound(own.begin(), own.end(), detection) - own.begin());
    const int beyond = at + side;
    if (beyond < 0 || beyond >= static_cast<int>(own.size())) return 0;
    if (film_.all[own[beyond]].step != next) return 0;
    return side > 0 ? light(chain, at + 1, 1) - light(chain, at + 1, -1)
                    : light(chain, at, -1) - light(chain, at, 1);
  }

  const FilmDetections& film_;
  std::vector<std::vector<int>> detections_;  ///< by chain, rising
  std::vector<int> chain_of_;                 ///< by detection
};

std::vector<int> chain_of_segments(std::size_t segments, const std::vector<Chain>& chains) {
  std::vector<int> chain_of(segments, -1);
  for (std::size_t i = 0; i < chains.size(); ++i)
    for (const int segment : chains[i].segments) chain_of[segment] = static_cast<int>(i);
  return chain_of;
}

}  // namespace

std::vector<KinshipEvent> find_kinship(const FilmDetections& film,
                                       const std::vector<Segment>& segments, const Lineage& lineage,
                                       const std::vector<Chain>& chains) {
  std::vector<KinshipEvent> events;
  const KinshipFinder finder(film, segments, chains);
  const auto chain_of = chain_of_segments(segments.size(), chains);
  for (int i = 0; i < static_cast<int>(chains.size()); ++i) {
    const int first = chains[i].segments.front(), last = chains[i].segments.back();
    const double started = start_min(film, segments[first]);
    const int mother = lineage.mother[first] < 0 ? -1 : chain_of[lineage.mother[first]];
    if (mother >= 0) {
      events.push_back({i, mother, Kinship::division, started});
    } else if (const int whole = finder.broken_from(i); whole >= 0) {
      events.push_back({i, whole, Kinship::fragment, started});
    }
    const int taker = finder.taken_up_by(i);
    if (taker >= 0) events.push_back({taker, i, Kinship::fusion, end_min(film, segments[last])});
  }
  std::stable_sort(events.begin(), events.end(), [](const auto& a, const auto& b) {
    return a.chain != b.chain ? a.chain < b.chain : a.time_min < b.time_min;
  });
  return events;
}

}  // namespace wavefount::tracking
