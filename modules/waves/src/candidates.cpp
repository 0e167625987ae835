#include "wavefount/waves/candidates.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <numeric>

#include "wavefount/core/robust.h"

namespace wavefount {
namespace {

/// Nuclei first, then the middles of their links: the field's minimum lies between nuclei as often
/// as at one.
struct DrawingBoard {
  std::vector<Point> places_um;
  std::vector<int> nearest;  ///< arrival nearest to each place
  FieldGraph graph;
};

void connect(FieldGraph& graph, int a, int b, bool gap) {
  graph.neighbours[a].push_back(b);
  graph.over_gap[a].push_back(gap);
  graph.neighbours[b].push_back(a);
  graph.over_gap[b].push_back(gap);
}

double distance(Point a, Point b) {
  return std::hypot(a.x - b.x, a.y - b.y);
}

DrawingBoard drawing_board(const Arrivals& arrivals, const std::vector<Link>& links) {
  // A draw costs the square, its preparation the cube of the number of places.
  constexpr std::size_t most_places = 260;
  DrawingBoard board;
  board.places_um = arrivals.places_um;
  board.nearest.resize(arrivals.places_um.size());
  std::iota(board.nearest.begin(), board.nearest.end(), 0);
  const bool middles = arrivals.places_um.size() + links.size() <= most_places;
  const auto count = arrivals.places_um.size() + (middles ? links.size() : 0);
  board.graph.neighbours.resize(count);
  board.graph.over_gap.resize(count);
  for (const auto& link : links) {
    if (!middles || link.bridge) {
      connect(board.graph, link.a, link.b, link.bridge);
      if (!middles) continue;
    }
    const auto middle = static_cast<int>(board.places_um.size());
    const Point a = arrivals.places_um[link.a];
    const Point b = arrivals.places_um[link.b];
    if (link.bridge) continue;
    board.places_um.push_back({(a.x + b.x) / 2, (a.y + b.y) / 2});
    board.nearest.push_back(link.a);
    connect(board.graph, link.a, middle, false);
    connect(board.graph, middle, link.b, false);
  }
  board.graph.neighbours.resize(board.places_um.size());
  board.graph.over_gap.resize(board.places_um.size());
  return board;
}

/// A minimum of one draw.
struct Sample {
  int draw = 0;
  int leader = 0;
  Point place_um;
  double value = 0;
  std::optional<double> prominence;
  bool behind_gap = false;
  std::vector<char> basin;  ///< by arrival
  int candidate = -1;
};

std::vector<Sample> samples_of(const DrawingBoard& board, const std::vector<double>& field,
                               std::size_t arrivals, int draw, double least_prominence) {
  const auto basins = find_minima(field, board.graph, least_prominence);
  std::vector<Sample> samples;
  for (const auto& minimum : basins.minima) {
    Sample sample;
    sample.draw = draw;
    sample.leader = board.nearest[minimum.place];
    sample.place_um = board.places_um[minimum.place];
    if (minimum.place >= static_cast<int>(arrivals)) {
      // Of the two nuclei beside a middle the earlier one leads.
      for (const int near : board.graph.neighbours[minimum.place])
        if (field[near] < field[sample.leader]) sample.leader = near;
    }
    sample.value = minimum.value;
    sample.prominence = minimum.prominence;
    sample.behind_gap = minimum.behind_gap;
    sample.basin.assign(arrivals, 0);
    samples.push_back(std::move(sample));
  }
  for (std::size_t i = 0; i < arrivals; ++i) samples[basins.basin[i]].basin[i] = 1;
  return samples;
}

/// How many draws each set of scales gets, in proportion to its weight; few sets, since each
/// costs a factorisation.
std::vector<std::pair<FieldScale, int>> shares_of_draws(const FieldFit& fit, int draws) {
  constexpr int slots = 16;
  std::vector<std::pair<FieldScale, int>> shares;
  double cumulative = 0;
  int used = 0;
  for (const auto& one : fit.scales) {
    cumulative += one.weight;
    const int until = static_cast<int>(std::floor(cumulative * slots + 0.5));
    if (until > used) shares.emplace_back(one.scale, until - used);
    used = std::max(used, until);
  }
  int given = 0;
  for (auto& share : shares) {
    share.second = share.second * draws / std::max(used, 1);
    given += share.second;
  }
  if (!shares.empty()) shares.front().second += draws - given;
  return shares;
}

std::vector<Sample> draw_samples(const Arrivals& arrivals, const FieldFit& fit,
                                 const DrawingBoard& board, const CandidateSearch& search) {
  const CounterRandom random(search.seed);
  std::vector<Sample> samples;
  int draw = 0;
  for (const auto& [scale, count] : shares_of_draws(fit, search.draws)) {
    const FieldPosterior posterior(arrivals, fit.astray, scale, board.places_um);
    for (int i = 0; i < count; ++i, ++draw) {
      const Eigen::VectorXd drawn = posterior.draw(random, static_cast<std::uint64_t>(draw));
      const std::vector<double> field(drawn.data(), drawn.data() + drawn.size());
      auto found =
          samples_of(board, field, arrivals.places_um.size(), draw, search.least_prominence_min);
      std::move(found.begin(), found.end(), std::back_inserter(samples));
    }
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

/// Gathers samples around the places where most of them lie.
class Matching {
 public:
  Matching(std::vector<Sample>& samples, const Arrivals& arrivals, const CandidateSearch& search)
      : samples_(samples), arrivals_(arrivals), search_(search) {}

  std::vector<Candidate> run() {
    std::vector<Candidate> found;
    constexpr double least_probability = 0.05;
    for (;;) {
      const int centre = densest();
      if (centre < 0) break;
      const auto members = claim(centre, static_cast<int>(found.size()));
      const double probability =
          static_cast<double>(members.size()) / static_cast<double>(search_.draws);
      if (probability < least_probability) break;
      found.push_back(summary(members, probability));
    }
    return found;
  }

 private:
  /// The arrival with most unclaimed minima within one spacing, each draw counted once.
  int densest() const {
    int best = -1;
    int most = 0;
    std::vector<int> leaders(arrivals_.places_um.size(), 0);
    for (const auto& sample : samples_) leaders[sample.leader] += sample.candidate == -1;
    for (int i = 0; i < static_cast<int>(leaders.size()); ++i) {
      if (leaders[i] == 0) continue;
      int last = -1, count = 0;
      for (const auto& sample : samples_) {
        if (sample.candidate != -1 || sample.draw == last || !near(sample, i)) continue;
        last = sample.draw;
        ++count;
      }
      // Of equally good places the one where the minima themselves lie.
      const int score = count * static_cast<int>(search_.draws + 1) + leaders[i];
      if (score > most) {
        most = score;
        best = i;
      }
    }
    return best;
  }

  bool near(const Sample& sample, int arrival) const {
    return distance(sample.place_um, arrivals_.places_um[arrival]) <= search_.spacing_um;
  }

  std::vector<char> usual_basin(int centre) const {
    std::vector<double> counts(arrivals_.places_um.size(), 0.0);
    double samples = 0;
    for (const auto& sample : samples_) {
      if (sample.candidate != -1 || !near(sample, centre)) continue;
      ++samples;
      for (std::size_t i = 0; i < counts.size(); ++i) counts[i] += sample.basin[i];
    }
    std::vector<char> usual(counts.size(), 0);
    for (std::size_t i = 0; i < counts.size(); ++i) usual[i] = 2 * counts[i] > samples;
    usual[centre] = 1;
    return usual;
  }

  std::vector<int> claim(int centre, int number) {
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
    for (const int at : members) edge += search_.at_view_edge[samples_[at].leader];
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
  const CandidateSearch& search_;
};

/// The minima of each draw, as candidates.
std::vector<std::vector<int>> candidates_by_draw(const std::vector<Sample>& samples, int draws) {
  std::vector<std::vector<int>> by_draw(draws);
  for (const auto& sample : samples) by_draw[sample.draw].push_back(sample.candidate);
  return by_draw;
}

void add_probabilities(Candidates& result, const std::vector<Sample>& samples,
                       const CandidateSearch& search) {
  std::vector<int> named;
  for (int i = 0; i < static_cast<int>(result.found.size()); ++i)
    if (result.found[i].probability >= 0.5) named.push_back(i);
  const double share = 1.0 / search.draws;
  for (const auto& draw : candidates_by_draw(samples, search.draws)) {
    if (draw.size() == 1 && draw.front() == 0) result.alone_probability += share;
    const bool all = std::all_of(named.begin(), named.end(), [&](int one) {
      return std::find(draw.begin(), draw.end(), one) != draw.end();
    });
    if (all && !named.empty()) result.joint_probability += share;
  }
  std::vector<char> entering(search.draws, 0);
  for (const auto& sample : samples)
    if (search.at_view_edge[sample.leader]) entering[sample.draw] = 1;
  for (const char one : entering) result.entering_probability += share * one;
}

void add_basins(Candidates& result, const std::vector<Sample>& samples, std::size_t arrivals) {
  std::vector<std::vector<int>> counts(arrivals, std::vector<int>(result.found.size(), 0));
  for (const auto& sample : samples) {
    if (sample.candidate < 0 || sample.candidate >= static_cast<int>(result.found.size())) continue;
    if (result.found[sample.candidate].probability < 0.5) continue;
    for (std::size_t i = 0; i < arrivals; ++i) counts[i][sample.candidate] += sample.basin[i];
  }
  for (const auto& own : counts) {
    const auto most = std::max_element(own.begin(), own.end());
    result.basin.push_back(most == own.end() || *most == 0 ? -1
                                                           : static_cast<int>(most - own.begin()));
  }
}

}  // namespace

FieldGraph field_graph(std::size_t places, const std::vector<Link>& links) {
  FieldGraph graph;
  graph.neighbours.resize(places);
  graph.over_gap.resize(places);
  for (const auto& link : links) connect(graph, link.a, link.b, link.bridge);
  return graph;
}

Candidates find_candidates(const Arrivals& arrivals, const FieldFit& fit,
                           const std::vector<Link>& links, const CandidateSearch& search) {
  const auto board = drawing_board(arrivals, links);
  auto samples = draw_samples(arrivals, fit, board, search);
  Candidates result;
  result.found = Matching(samples, arrivals, search).run();
  add_probabilities(result, samples, search);
  add_basins(result, samples, arrivals.places_um.size());
  return result;
}

MeanField mean_field(const Arrivals& arrivals, const FieldFit& fit) {
  const auto count = arrivals.places_um.size();
  MeanField field{std::vector<double>(count, 0.0), std::vector<double>(count, 0.0)};
  constexpr double enough_weight = 0.95;
  double all = 0;
  std::vector<double> square(count, 0.0), variance(count, 0.0);
  for (const auto& [scale, weight] : fit.scales) {
    const FieldPosterior posterior(arrivals, fit.astray, scale, arrivals.places_um);
    const Eigen::VectorXd se = posterior.se_min();
    for (std::size_t i = 0; i < count; ++i) {
      const auto at = static_cast<Eigen::Index>(i);
      field.mean_min[i] += weight * posterior.mean_min()(at);
      variance[i] += weight * se(at) * se(at);
    }
    all += weight;
    if (all > enough_weight) break;
  }
  for (std::size_t i = 0; i < count && all > 0; ++i) {
    field.mean_min[i] /= all;
    field.se_min[i] = std::sqrt(variance[i] / all);
  }
  return field;
}

std::vector<double> chance_of_first(const Arrivals& arrivals, const FieldFit& fit,
                                    double trend_sd_min_per_um, int draws, std::uint64_t seed) {
  const auto count = arrivals.places_um.size();
  std::vector<double> chance(count, 0.0);
  const CounterRandom random(seed);
  int drawn = 0;
  for (const auto& [scale, share] : shares_of_draws(fit, draws)) {
    const FieldPrior prior(arrivals.places_um, scale, trend_sd_min_per_um);
    for (int i = 0; i < share; ++i, ++drawn) {
      const Eigen::VectorXd field = prior.draw(random, static_cast<std::uint64_t>(drawn));
      Eigen::Index first = 0;
      field.minCoeff(&first);
      chance[first] += 1.0 / draws;
    }
  }
  return chance;
}

}  // namespace wavefount
