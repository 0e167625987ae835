#include "wavefount/waves/candidates.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <numeric>

#include "wavefount/core/robust.h"

namespace wavefount {
namespace {

double distance(Point a, Point b) {
  return std::hypot(a.x - b.x, a.y - b.y);
}

/// How far inside the view a place lies, from one of its edges.
double depth_from(ViewEdge edge, Point place, const Tube& tube) {
  switch (edge) {
    case left_edge:
      return place.x;
    case right_edge:
      return tube.length_um - place.x;
    case upper_edge:
      return place.y + tube.width_um / 2;
    case lower_edge:
      return tube.width_um / 2 - place.y;
  }
  return 0;
}

constexpr ViewEdge all_edges[] = {left_edge, right_edge, upper_edge, lower_edge};

Boundary boundary_at(ViewEdge edge, const Tube& tube) {
  switch (edge) {
    case left_edge:
      return tube.left_end;
    case right_edge:
      return tube.right_end;
    case upper_edge:
      return tube.upper_wall;
    case lower_edge:
      return tube.lower_wall;
  }
  return Boundary::closed;
}

bool parted(int which, ViewEdge edge, const std::vector<Point>& places, const Tube& tube) {
  const double depth = depth_from(edge, places[which], tube);
  Point foot = places[which];
  if (edge == left_edge) foot.x -= depth;
  if (edge == right_edge) foot.x += depth;
  if (edge == upper_edge) foot.y -= depth;
  if (edge == lower_edge) foot.y += depth;
  for (int i = 0; i < static_cast<int>(places.size()); ++i)
    if (i != which && distance(places[i], foot) < std::abs(depth)) return true;
  return false;
}

/// A minimum of one draw.
struct Sample {
  int draw = 0;
  int leader = 0;
  Point place_um;
  Point matched_um;  ///< where nuclei can tell it: within half a spacing of the leader
  double value = 0;
  std::optional<double> prominence;
  bool behind_gap = false;
  bool entering = false;
  std::vector<char> basin;  ///< by arrival
  int candidate = -1;
};

/// Where the drawn fields are looked at.
struct Board {
  const Arrivals& arrivals;
  const std::vector<Link>& links;
  const CandidateSearch& search;
  std::vector<unsigned> edges;
};

int leader_of(const Basins& basins, int which, const SourceDraw& draw) {
  int leader = -1;
  for (int i = 0; i < static_cast<int>(basins.basin.size()); ++i) {
    if (basins.basin[i] != which) continue;
    if (leader < 0 || draw.field_min[i] < draw.field_min[leader]) leader = i;
  }
  return leader;
}

/// The front comes in over an open edge when its source lies no deeper in the view than the nucleus
/// at that edge which it reaches first; a quarter of a spacing is not told apart.
bool enters(Point source, int leader, const Board& board) {
  const double slack = board.search.spacing_um / 4;
  return std::any_of(std::begin(all_edges), std::end(all_edges), [&](ViewEdge edge) {
    if ((board.edges[leader] & edge) == 0) return false;
    const Tube& tube = *board.search.tube;
    return depth_from(edge, source, tube) <=
           depth_from(edge, board.arrivals.places_um[leader], tube) + slack;
  });
}

/// From a place towards another, at most so far.
Point towards(Point from, Point to, double most) {
  const double away = distance(from, to);
  const double share = away > most ? most / away : 1;
  return {from.x + share * (to.x - from.x), from.y + share * (to.y - from.y)};
}

std::vector<Sample> samples_of(const SourceDraw& draw, int number, const Board& board) {
  // Two sources less than two spacings apart, or one that the other's front has almost reached
  // when it starts, are not told from the scatter of single nuclei: the saddle between them lies
  // less than a spacing's travel above.
  constexpr double least_spacings = 1;
  const auto basins = find_minima(
      draw, board.links, least_spacings * board.search.spacing_um * draw.slowness_min_per_um);
  std::vector<Sample> samples;
  for (int i = 0; i < static_cast<int>(basins.minima.size()); ++i) {
    const auto& minimum = basins.minima[i];
    Sample sample;
    sample.draw = number;
    sample.leader = leader_of(basins, i, draw);
    sample.place_um = draw.places_um[minimum.source];
    sample.entering = enters(sample.place_um, sample.leader, board);
    if (sample.entering) sample.place_um = board.arrivals.places_um[sample.leader];
    sample.matched_um = towards(board.arrivals.places_um[sample.leader], sample.place_um,
                                board.search.spacing_um / 2);
    sample.value = draw.starts_min[minimum.source];
    sample.prominence = minimum.prominence;
    sample.behind_gap = minimum.behind_gap;
    for (const int basin : basins.basin) sample.basin.push_back(basin == i);
    samples.push_back(std::move(sample));
  }
  return samples;
}

double size_of(const std::vector<char>& basin) {
  return std::accumulate(basin.begin(), basin.end(), 0.0);
}

double common(const std::vector<char>& one, const std::vector<char>& two) {
  double sum = 0;
  for (std::size_t i = 0; i < one.size(); ++i) sum += one[i] && two[i];
  return sum;
}

/// Where the minima of one leader usually lie.
struct Usual {
  Point place, matched;
};

/// Gathers samples around the places where most of them lie.
class Matching {
 public:
  Matching(std::vector<Sample>& samples, const Arrivals& arrivals, double spacing_um, int draws)
      : samples_(samples), arrivals_(arrivals), spacing_um_(spacing_um), draws_(draws) {}

  std::vector<Candidate> run() {
    std::vector<Candidate> found;
    constexpr double least_probability = 0.05;
    for (;;) {
      const auto centre = densest();
      if (!centre) break;
      const auto members = claim(*centre, static_cast<int>(found.size()));
      const double probability = static_cast<double>(members.size()) / draws_;
      if (probability < least_probability) break;
      found.push_back(summary(members, probability));
    }
    sort_by_probability(found);
    return found;
  }

 private:
  void sort_by_probability(std::vector<Candidate>& found) {
    std::vector<int> order(found.size());
    std::iota(order.begin(), order.end(), 0);
    std::stable_sort(order.begin(), order.end(),
                     [&](int a, int b) { return found[a].probability > found[b].probability; });
    std::vector<Candidate> sorted;
    std::vector<int> position(found.size());
    for (const int one : order) {
      position[one] = static_cast<int>(sorted.size());
      sorted.push_back(std::move(found[one]));
    }
    found = std::move(sorted);
    for (auto& sample : samples_) {
      const bool kept = sample.candidate >= 0 && sample.candidate < static_cast<int>(found.size());
      sample.candidate = kept ? position[sample.candidate] : -1;
    }
  }

  /// The leader around whose usual minimum most unclaimed ones lie within a spacing.
  std::optional<Usual> densest() const {
    std::optional<Usual> best;
    int most = 0;
    for (const auto& [leader, place] : usual_places()) {
      int last = -1, count = 0;
      for (const auto& sample : samples_) {
        if (sample.candidate != -1 || sample.draw == last || !near(sample, place)) continue;
        last = sample.draw;
        ++count;
      }
      if (count <= most) continue;
      most = count;
      best = place;
    }
    return best;
  }

  /// Mean place of the unclaimed minima that each arrival leads.
  std::map<int, Usual> usual_places() const {
    std::map<int, Usual> sums;
    std::map<int, double> counts;
    for (const auto& sample : samples_) {
      if (sample.candidate != -1) continue;
      auto& sum = sums[sample.leader];
      sum.place.x += sample.place_um.x;
      sum.place.y += sample.place_um.y;
      sum.matched.x += sample.matched_um.x;
      sum.matched.y += sample.matched_um.y;
      ++counts[sample.leader];
    }
    for (auto& [leader, sum] : sums) {
      const double count = counts[leader];
      sum = {{sum.place.x / count, sum.place.y / count},
             {sum.matched.x / count, sum.matched.y / count}};
    }
    return sums;
  }

  bool near(const Sample& sample, const Usual& centre) const {
    return distance(sample.matched_um, centre.matched) <= spacing_um_ ||
           distance(sample.place_um, centre.place) <= spacing_um_;
  }

  std::vector<char> usual_basin(const Usual& centre) const {
    std::vector<double> counts(arrivals_.places_um.size(), 0.0);
    double samples = 0;
    for (const auto& sample : samples_) {
      if (sample.candidate != -1 || !near(sample, centre)) continue;
      ++samples;
      for (std::size_t i = 0; i < counts.size(); ++i) counts[i] += sample.basin[i];
    }
    std::vector<char> usual(counts.size(), 0);
    for (std::size_t i = 0; i < counts.size(); ++i) usual[i] = 2 * counts[i] > samples;
    return usual;
  }

  std::vector<int> claim(const Usual& centre, int number) {
    const auto usual = usual_basin(centre);
    std::vector<int> members;
    for (int i = 0; i < static_cast<int>(samples_.size()); ++i) {
      auto& sample = samples_[i];
      if (sample.candidate != -1 || !near(sample, centre)) continue;
      const bool again = !members.empty() && samples_[members.back()].draw == sample.draw;
      const double shared = common(sample.basin, usual);
      const bool same = 2 * shared >= std::min(size_of(sample.basin), size_of(usual));
      if (again || !same) continue;
      sample.candidate = number;
      members.push_back(i);
    }
    // Nothing matched: leave the place out of the further search.
    if (members.empty()) {
      for (auto& sample : samples_) {
        if (sample.candidate == -1 && near(sample, centre)) sample.candidate = -2;
      }
    }
    return members;
  }

  Candidate summary(const std::vector<int>& members, double probability) const {
    Candidate candidate;
    candidate.probability = probability;
    const auto count = static_cast<double>(members.size());
    std::map<int, int> leaders;
    std::vector<double> prominences;
    std::vector<double> basin(arrivals_.places_um.size(), 0.0);
    double gaps = 0;
    for (const int at : members) {
      const auto& sample = samples_[at];
      candidate.place_um.x += sample.place_um.x / count;
      candidate.place_um.y += sample.place_um.y / count;
      candidate.entry_min += sample.value / count;
      ++leaders[sample.leader];
      if (sample.prominence) prominences.push_back(*sample.prominence);
      gaps += sample.behind_gap;
      for (std::size_t i = 0; i < basin.size(); ++i) basin[i] += sample.basin[i];
    }
    candidate.leader = std::max_element(leaders.begin(), leaders.end(), [](auto& a, auto& b) {
                         return a.second < b.second;
                       })->first;
    candidate.first_share = 1 - static_cast<double>(prominences.size()) / count;
    candidate.behind_gap = 2 * gaps > count;
    for (int i = 0; i < static_cast<int>(basin.size()); ++i)
      if (2 * basin[i] > count) candidate.basin.push_back(i);
    candidate.position_se_um = spread(members, candidate.place_um);
    set_prominence(candidate, prominences);
    double edge = 0;
    for (const int at : members) edge += samples_[at].entering;
    candidate.at_view_edge = 2 * edge > count;
    return candidate;
  }

  double spread(const std::vector<int>& members, Point centre) const {
    double square = 0;
    for (const int at : members) {
      const double off = distance(samples_[at].place_um, centre);
      square += off * off;
    }
    return std::sqrt(square / static_cast<double>(members.size()));
  }

  static void set_prominence(Candidate& candidate, const std::vector<double>& prominences) {
    if (candidate.first_share >= 0.5 || prominences.empty()) return;
    double sum = 0, square = 0;
    for (const double one : prominences) sum += one;
    const auto count = static_cast<double>(prominences.size());
    for (const double one : prominences) square += (one - sum / count) * (one - sum / count);
    candidate.prominence_min = sum / count;
    candidate.prominence_se_min = std::sqrt(square / count);
  }

  std::vector<Sample>& samples_;
  const Arrivals& arrivals_;
  double spacing_um_;
  int draws_;
};

/// The minima of each draw, as candidates.
std::vector<std::vector<int>> candidates_by_draw(const std::vector<Sample>& samples, int draws) {
  std::vector<std::vector<int>> by_draw(draws);
  for (const auto& sample : samples) by_draw[sample.draw].push_back(sample.candidate);
  return by_draw;
}

void add_probabilities(Candidates& result, const std::vector<Sample>& samples, int draws) {
  std::vector<int> named;
  for (int i = 0; i < static_cast<int>(result.found.size()); ++i)
    if (result.found[i].probability >= 0.5) named.push_back(i);
  const double share = 1.0 / draws;
  for (const auto& draw : candidates_by_draw(samples, draws)) {
    if (draw.size() == 1 && draw.front() == 0) result.alone_probability += share;
    const bool all = std::all_of(named.begin(), named.end(), [&](int one) {
      return std::find(draw.begin(), draw.end(), one) != draw.end();
    });
    if (all && !named.empty()) result.joint_probability += share;
  }
  std::vector<char> entering(draws, 0);
  for (const auto& sample : samples)
    if (sample.entering) entering[sample.draw] = 1;
  for (const char one : entering) result.entering_probability += share * one;
}

void add_basins(Candidates& result, const std::vector<Sample>& samples, std::size_t arrivals) {
  std::vector<std::vector<int>> counts(arrivals, std::vector<int>(result.found.size(), 0));
  for (const auto& sample : samples) {
    if (sample.candidate < 0) continue;
    if (result.found[sample.candidate].probability < 0.5) continue;
    for (std::size_t i = 0; i < arrivals; ++i) counts[i][sample.candidate] += sample.basin[i];
  }
  for (const auto& own : counts) {
    const auto most = std::max_element(own.begin(), own.end());
    result.basin.push_back(most == own.end() || *most == 0 ? -1
                                                           : static_cast<int>(most - own.begin()));
  }
}

double spread_of(const std::vector<double>& values) {
  double mean = 0, square = 0;
  const auto count = static_cast<double>(values.size());
  for (const double value : values) mean += value / count;
  for (const double value : values) square += (value - mean) * (value - mean) / count;
  return std::sqrt(square);
}

void add_visibility(Candidates& result, const Arrivals& arrivals, const SourceFit& fit) {
  constexpr double least_share = 0.33;
  double error2 = 0;
  for (const double se : arrivals.se_min)
    error2 += se * se / static_cast<double>(arrivals.se_min.size());
  std::vector<double> ranges;
  for (const auto& draw : fit.draws) {
    const double noise = std::sqrt(draw.jitter_min * draw.jitter_min + error2);
    if (spread_of(draw.field_min) > least_share * noise)
      result.visible_probability += 1.0 / static_cast<double>(fit.draws.size());
    const auto [low, high] = std::minmax_element(draw.field_min.begin(), draw.field_min.end());
    ranges.push_back(*high - *low);
  }
  result.range_min = median(std::move(ranges));
}

}  // namespace

std::vector<unsigned> view_edges(const Arrivals& arrivals, const Tube& tube, bool wide) {
  std::vector<unsigned> edges(arrivals.places_um.size(), 0);
  for (const ViewEdge edge : all_edges) {
    const bool wall = edge == upper_edge || edge == lower_edge;
    if (boundary_at(edge, tube) == Boundary::closed || (wall && !wide)) continue;
    for (int i = 0; i < static_cast<int>(edges.size()); ++i)
      if (!parted(i, edge, arrivals.places_um, tube)) edges[i] |= edge;
  }
  return edges;
}

Candidates find_candidates(const Arrivals& arrivals, const SourceFit& fit,
                           const std::vector<Link>& links, const CandidateSearch& search) {
  Candidates result;
  const Board board{arrivals, links, search, view_edges(arrivals, *search.tube, search.wide)};
  const auto draws = static_cast<int>(fit.draws.size());
  std::vector<Sample> samples;
  for (int i = 0; i < draws; ++i) {
    auto found = samples_of(fit.draws[i], i, board);
    std::move(found.begin(), found.end(), std::back_inserter(samples));
  }
  result.found = Matching(samples, arrivals, search.spacing_um, draws).run();
  add_probabilities(result, samples, draws);
  add_basins(result, samples, arrivals.places_um.size());
  add_visibility(result, arrivals, fit);
  return result;
}

}  // namespace wavefount
