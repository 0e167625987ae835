#include "mitosis.h"

#include <algorithm>
#include <cmath>

#include "wavefount/core/robust.h"
#include "wavefount/tracking/assignment.h"

namespace wavefount::tracking {
namespace {

/// Rounds of assignment and re-estimation; the figures settle after two.
constexpr int rounds = 4;
/// A rival whose log-odds come this near makes a pair unfit to learn from.
constexpr double rival_margin = 3;
/// A pairing of the neighbours that would cost less than this more leaves the identity in doubt.
constexpr double doubt_margin = 2;
/// Already bright at a film's first frame: as a share of what nuclei show before they let go.
constexpr double grown_share = 0.4;

/// Ends and starts as the assignment sees them, worked out once.
struct Ends {
  std::vector<double> start_min, end_min;
  std::vector<Point> start, end;
  std::vector<double> start_brightness, end_brightness;
  std::vector<bool> may_go_on, may_begin;
  std::vector<int> by_start;  ///< segments by time of their start
};

class MitosisLinker {
 public:
  MitosisLinker(const FilmDetections& film, const Motion& motion, const Flow& flow,
                const std::vector<Segment>& segments, const Evidence& evidence,
                const LinkSettings& settings)
      : film_(film),
        motion_(motion),
        flow_(flow),
        segments_(segments),
        evidence_(evidence),
        settings_(settings) {
    gather_ends();
  }

  Lineage link() {
    const auto prior = prior_model(film_, evidence_, settings_);
    auto model = prior;
    std::vector<Rebirth> candidates;
    std::vector<int> next;
    for (int round = 0; round < rounds; ++round) {
      candidates = all_candidates(model);
      next = assign(candidates);
      if (round + 1 == rounds) break;
      const auto turnover = with_turnover(model, next);
      model = fitted_model(film_, prior, settings_, unrivalled(candidates, next));
      model.birth_density = turnover.birth_density;
      model.end_share = turnover.end_share;
    }
    return lineage(model, candidates, next);
  }

 private:
  void gather_ends() {
    const auto count = segments_.size();
    const double grown = grown_share * typical_end_brightness();
    ends_.may_go_on.assign(count, false);
    ends_.may_begin.assign(count, false);
    for (std::size_t i = 0; i < count; ++i) {
      const auto& one = segments_[i];
      ends_.start_min.push_back(start_min(film_, one));
      ends_.end_min.push_back(end_min(film_, one));
      ends_.start.push_back(start_place(film_, one));
      ends_.end.push_back(end_place(film_, one));
      ends_.start_brightness.push_back(start_brightness(film_, one));
      ends_.end_brightness.push_back(end_brightness(film_, one));
      const bool strong = !evidence_.weak[i];
      const bool grown_at_start = at_film_start(film_, one) && ends_.end_brightness.back() >= grown;
      ends_.may_go_on[i] = last_step(film_, one) < film_.steps() - 1 && (strong || grown_at_start);
      ends_.may_begin[i] = first_step(film_, one) > 0 && (strong || at_film_end(film_, one));
      ends_.by_start.push_back(static_cast<int>(i));
    }
    std::stable_sort(ends_.by_start.begin(), ends_.by_start.end(),
                     [&](int a, int b) { return ends_.start_min[a] < ends_.start_min[b]; });
  }

  double typical_end_brightness() const {
    std::vector<double> values;
    for (std::size_t i = 0; i < segments_.size(); ++i)
      if (!evidence_.weak[i]) values.push_back(end_brightness(film_, segments_[i]));
    return median(std::move(values));
  }

  double new_density(const MitosisModel& model, int segment) const {
    return evidence_.weak[segment] ? model.birth_density + model.false_density
                                   : model.birth_density;
  }

  Rebirth candidate(const MitosisModel& model, int from, int to) const {
    Rebirth one;
    one.from = from;
    one.to = to;
    one.gap_min = ends_.start_min[to] - ends_.end_min[from];
    const Point expected =
        ends_.end[from] + flow_.shift(ends_.end[from], last_step(film_, segments_[from]),
                                      first_step(film_, segments_[to]));
    one.displacement_um = distance(ends_.start[to], expected);
    const double density = new_density(model, to);
    const double ratio = log_ratio(ends_.start_brightness[to], ends_.end_brightness[from]);
    one.log_odds = std::max(
        mitosis_odds(model, one.gap_min, one.displacement_um, density),
        missed_odds(film_, motion_, model, one.gap_min, one.displacement_um, ratio, density));
    return one;
  }

  std::vector<Rebirth> all_candidates(const MitosisModel& model) const {
    std::vector<Rebirth> candidates;
    for (int from = 0; from < static_cast<int>(segments_.size()); ++from) {
      if (!ends_.may_go_on[from]) continue;
      const double end = ends_.end_min[from];
      auto at = std::partition_point(ends_.by_start.begin(), ends_.by_start.end(),
                                     [&](int other) { return ends_.start_min[other] <= end; });
      for (; at != ends_.by_start.end(); ++at) {
        if (ends_.start_min[*at] - end > model.longest_min()) break;
        if (!ends_.may_begin[*at]) continue;
        const auto one = candidate(model, from, *at);
        if (one.displacement_um <= model.reach_um && one.log_odds > 0) candidates.push_back(one);
      }
    }
    return candidates;
  }

  std::vector<int> assign(const std::vector<Rebirth>& candidates) const {
    std::vector<AssignmentCandidate> pairs;
    for (const auto& one : candidates) pairs.push_back({one.from, one.to, -one.log_odds});
    const std::vector<double> alone(segments_.size(), 0);
    return assign_or_leave(pairs, alone, alone);
  }

  /// Pairs made whose partners have no other candidate nearly as good, both sides well seen.
  std::vector<Rebirth> unrivalled(const std::vector<Rebirth>& candidates,
                                  const std::vector<int>& next) const {
    std::vector<double> made(segments_.size(), 0), made_to(segments_.size(), 0);
    for (const auto& one : candidates)
      if (next[one.from] == one.to) made[one.from] = made_to[one.to] = one.log_odds;
    std::vector<bool> rivalled_from(segments_.size(), false), rivalled_to(rivalled_from);
    for (const auto& one : candidates) {
      if (next[one.from] == one.to) continue;
      if (one.log_odds > made[one.from] - rival_margin) rivalled_from[one.from] = true;
      if (one.log_odds > made_to[one.to] - rival_margin) rivalled_to[one.to] = true;
    }
    std::vector<Rebirth> clear;
    for (const auto& one : candidates)
      if (next[one.from] == one.to && !rivalled_from[one.from] && !rivalled_to[one.to] &&
          !evidence_.weak[one.from] && !evidence_.weak[one.to] && was_mitosis(one))
        clear.push_back(one);
    return clear;
  }

  /// A nucleus is dimmer after mitosis than before; otherwise it was merely not detected.
  bool was_mitosis(const Rebirth& one) const {
    return ends_.start_brightness[one.to] < 0.75 * ends_.end_brightness[one.from];
  }

  /// Share of ends that were not followed although the film went on, and density of new starts.
  MitosisModel with_turnover(MitosisModel model, const std::vector<int>& next) const {
    std::vector<bool> continued(segments_.size(), false);
    for (const int to : next)
      if (to >= 0) continued[to] = true;
    const double until = film_.time_min.back() - 2 * model.gap_min;
    const double since = film_.time_min.front() + 2 * model.gap_min;
    double ends = 2, ended = 1, births = 1;
    for (std::size_t i = 0; i < segments_.size(); ++i) {
      if (evidence_.weak[i]) continue;
      if (ends_.may_go_on[i] && ends_.end_min[i] < until) {
        ++ends;
        if (next[i] < 0) ++ended;
      }
      if (ends_.may_begin[i] && ends_.start_min[i] > since && !continued[i]) ++births;
    }
    model.end_share = std::clamp(ended / ends, 0.01, 0.5);
    const double watched = std::max(film_.duration_min() - 2 * model.gap_min, model.gap_min);
    model.birth_density = births / (film_.area_um2 * watched);
    return model;
  }

  Lineage lineage(const MitosisModel& model, const std::vector<Rebirth>& candidates,
                  const std::vector<int>& next) const {
    Lineage made;
    made.model = model;
    made.next = next;
    made.previous.assign(segments_.size(), -1);
    made.mother.assign(segments_.size(), -1);
    made.mitosis_min.assign(segments_.size(), 0);
    for (std::size_t i = 0; i < next.size(); ++i)
      if (next[i] >= 0) made.previous[next[i]] = static_cast<int>(i);
    for (const auto& one : candidates)
      if (next[one.from] == one.to && was_mitosis(one))
        made.mitosis_min[one.to] = out_of_sight(one);
    made.doubtful = doubts(candidates, next);
    if (settings_.divisions) add_daughters(candidates, made);
    return made;
  }

  /// Loss and re-formation lie between sightings: half a step on either side on average.
  double out_of_sight(const Rebirth& one) const {
    const int lost = last_step(film_, segments_[one.from]);
    const int formed = first_step(film_, segments_[one.to]);
    return (film_.time_min[formed] + film_.time_min[formed - 1] - film_.time_min[lost] -
            film_.time_min[lost + 1]) /
           2;
  }

  /// Log-odds of a candidate, 0 where there is none. Candidates come by rising `from`.
  static double odds_of(const std::vector<Rebirth>& candidates, int from, int to) {
    auto at = std::partition_point(candidates.begin(), candidates.end(),
                                   [&](const Rebirth& one) { return one.from < from; });
    for (; at != candidates.end() && at->from == from; ++at)
      if (at->to == to) return at->log_odds;
    return 0;
  }

  /// A start is in doubt when leaving it, or swapping with another pair, costs little more.
  std::vector<bool> doubts(const std::vector<Rebirth>& candidates,
                           const std::vector<int>& next) const {
    std::vector<double> made(segments_.size(), 0), made_to(segments_.size(), 0);
    std::vector<int> previous(segments_.size(), -1);
    for (const auto& one : candidates)
      if (next[one.from] == one.to) {
        made[one.from] = made_to[one.to] = one.log_odds;
        previous[one.to] = one.from;
      }
    std::vector<bool> doubtful(segments_.size(), false);
    for (const auto& one : candidates) {
      if (next[one.from] == one.to) continue;
      const int other_to = next[one.from], other_from = previous[one.to];
      const double loses = made[one.from] + made_to[one.to] - one.log_odds -
                           odds_of(candidates, other_from, other_to);
      if (loses > doubt_margin) continue;
      if (other_to >= 0) doubtful[other_to] = true;
      if (other_from >= 0) doubtful[one.to] = true;
    }
    return doubtful;
  }

  /// What re-formed near a loss that already goes on elsewhere is its second daughter: each end
  /// takes at most one more start.
  void add_daughters(const std::vector<Rebirth>& candidates, Lineage& made) const {
    std::vector<Rebirth> open;
    for (const auto& one : candidates)
      if (made.next[one.from] >= 0 && made.previous[one.to] < 0 && !evidence_.weak[one.to])
        open.push_back(one);
    const auto second = assign(open);
    for (std::size_t from = 0; from < second.size(); ++from)
      if (second[from] >= 0) made.mother[second[from]] = static_cast<int>(from);
  }

  const FilmDetections& film_;
  const Motion& motion_;
  const Flow& flow_;
  const std::vector<Segment>& segments_;
  const Evidence& evidence_;
  const LinkSettings& settings_;
  Ends ends_;
};

}  // namespace

Lineage link_mitoses(const FilmDetections& film, const Motion& motion, const Flow& flow,
                     const std::vector<Segment>& segments, const Evidence& evidence,
                     const LinkSettings& settings) {
  if (segments.empty()) return {};
  return MitosisLinker(film, motion, flow, segments, evidence, settings).link();
}

}  // namespace wavefount::tracking
