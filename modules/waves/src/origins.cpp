#include "wavefount/waves/origins.h"

#include <algorithm>
#include <cmath>

#include "wavefount/core/robust.h"
#include "wavefount/waves/answer.h"
#include "wavefount/waves/field.h"
#include "wavefount/waves/leads.h"
#include "wavefount/waves/markers.h"
#include "wavefount/waves/order.h"
#include "wavefount/waves/sites.h"

namespace wavefount {
namespace {

/// Streams of random numbers: one number a wave and purpose.
enum class Purpose : std::uint64_t { order = 1, chance = 2, leads = 3 };

std::uint64_t seed_for(std::uint64_t seed, int wave, Purpose purpose) {
  return seed + 1000003U * static_cast<std::uint64_t>(wave) +
         0x9e3779b97f4a7c15U * static_cast<std::uint64_t>(purpose);
}

/// Standard deviation of the waves' slopes along the tube, for random fields like them.
double trend_sd(const ArrivalFields& fields) {
  double square = 0, count = 0;
  for (std::size_t i = 0; i < fields.arrivals.size(); ++i) {
    if (fields.fits[i].draws.empty()) continue;
    const auto flat =
        flat_slowness(fields.arrivals[i], fields.fits[i].astray, fields.fits[i].jitter_min);
    square +=
        std::max(flat.min_per_um * flat.min_per_um - flat.se_min_per_um * flat.se_min_per_um, 0.0);
    ++count;
  }
  return count > 0 ? std::sqrt(square / count) : 0;
}

/// One wave on its way to its answer.
class WaveOrigins {
 public:
  WaveOrigins(Wave& wave, std::size_t at, WaveEntries& entries, const OriginView& view,
              const OriginRules& rules, double trend)
      : wave_(wave),
        entries_(entries),
        view_(view),
        rules_(rules),
        trend_(trend),
        arrivals_(view.fields->arrivals[at]),
        fit_(view.fields->fits[at]),
        links_(view.fields->links[at]),
        candidates_(view.fields->candidates[at]) {
    // Steeper than this, a difference of half a period is within the scatter of neighbours.
    constexpr double steep = 0.8;
    constexpr double contradicting = 0.1;
    findings_.number_doubtful =
        view.fields->steepness[at] > steep || view.fields->contradicting_share[at] > contradicting;
  }

  void run() {
    measure();
    wave_.answer = answer_of(findings_, rules_);
    name_origins();
    claim();
    drop_speeds();
    add_reasons(wave_, entries_, findings_);
    add_lost_near_origin();
    set_brightness_at_age(wave_, entries_, *view_.interphases);
    add_markers();
    time_among_neighbours(wave_, entries_, fit_.astray,
                          seed_for(rules_.seed, wave_.number, Purpose::leads));
  }

 private:
  double spacing() const { return view_.fields->spacing_um; }

  void measure() {
    findings_.timed = arrivals_.times_min.size();
    if (fit_.draws.empty()) return;
    findings_.order_p = order_p_value(arrivals_, fit_.astray, links_, rules_.permutations,
                                      seed_for(rules_.seed, wave_.number, Purpose::order));
    findings_.spread_min = spread_min(arrivals_);
    constexpr double share_of_period = 0.08;
    findings_.scatter_min = rules_.scatter_min.value_or(share_of_period * view_.fields->period_min);
    // Entries are timed finer than a frame; what all of them share, a field does not resolve.
    findings_.finest_min = std::max(rules_.frame_interval_min / 2, 2 * median(arrivals_.se_min));
    findings_.candidates = candidates_;
    findings_.began_before_film = began_before_film();
  }

  /// The first candidates at the film's start, beside a nucleus whose entry was not seen.
  bool began_before_film() const {
    const double slowness = wave_.slowness ? std::abs(wave_.slowness->min_per_um) : 0;
    const double passing = 2 * spacing() * slowness;
    for (const auto& candidate : findings_.candidates.found) {
      if (candidate.probability < 0.5) continue;
      const double since = arrivals_.times_min[candidate.leader] - rules_.film_start_min;
      if (since < std::max(passing, 2 * rules_.frame_interval_min) &&
          has_unseen_neighbour(candidate))
        return true;
    }
    return false;
  }

  bool has_unseen_neighbour(const Candidate& candidate) const {
    const auto& leader = entries_.entries[wave_.entries[candidate.leader]];
    for (const auto& station : view_.chronology->stations) {
      const bool timed = std::any_of(station.entries.begin(), station.entries.end(), [&](int one) {
        return entries_.entries[one].wave == wave_.number;
      });
      const double away =
          std::hypot(station.place_um.x - leader.x_um, station.place_um.y - leader.y_um);
      constexpr double spacings = 1.6;
      if (!timed && away < spacings * spacing()) return true;
    }
    return false;
  }

  bool shows_origins() const {
    return wave_.answer == Answer::enters_view || wave_.answer == Answer::coexisting ||
           wave_.answer == Answer::single || wave_.answer == Answer::ambiguous;
  }

  void name_origins() {
    if (wave_.answer == Answer::too_few) return name_leader();
    if (!shows_origins()) return;
    constexpr int random_fields = 400;
    const auto scales = fit_scales(arrivals_, fit_.astray, fit_.jitter_min, spacing());
    const auto chance = chance_of_first(arrivals_, scales, trend_, random_fields,
                                        seed_for(rules_.seed, wave_.number, Purpose::chance));
    for (const auto& candidate : findings_.candidates.found) {
      Origin origin = described(candidate);
      origin.number = static_cast<int>(wave_.origins.size()) + 1;
      set_chances(origin, chance);
      wave_.origins.push_back(origin);
    }
  }

  Site site_of_arrival(int arrival) const {
    const auto edges = view_edges(arrivals_, *view_.tube, view_.fields->wide);
    if (edges[arrival] != 0) return Site::view_edge;
    return site_of(straight_place(arrivals_.places_um[arrival], *view_.tube), spacing(),
                   view_.fields->wide);
  }

  Origin described(const Candidate& candidate) const {
    Origin origin;
    origin.probability = candidate.probability;
    origin.nucleus = entries_.entries[wave_.entries[candidate.leader]].nucleus;
    origin.along_um = candidate.place_um.x;
    origin.across_um = candidate.place_um.y;
    const Point image = image_place(candidate.place_um, *view_.tube);
    origin.x_um = image.x;
    origin.y_um = image.y;
    origin.position_se_um = candidate.position_se_um;
    origin.entry_min = candidate.entry_min;
    origin.prominence_min = candidate.prominence_min;
    origin.prominence_se_min = candidate.prominence_se_min;
    origin.basin_nuclei = static_cast<int>(candidate.basin.size());
    origin.site = candidate.at_view_edge ? Site::view_edge
                                         : site_of(straight_place(candidate.place_um, *view_.tube),
                                                   spacing(), view_.fields->wide);
    return origin;
  }

  void set_chances(Origin& origin, const std::vector<double>& chance) const {
    double share = 0, smooth = 0;
    for (int i = 0; i < static_cast<int>(arrivals_.places_um.size()); ++i) {
      if (site_of_arrival(i) != origin.site) continue;
      share += 1.0 / static_cast<double>(arrivals_.places_um.size());
      smooth += chance[i];
    }
    origin.chance_of_site = share;
    origin.chance_of_site_smooth = smooth;
  }

  /// Two to four nuclei: who was first, by the timing errors alone.
  void name_leader() {
    const auto shares =
        first_probabilities(wave_, entries_, seed_for(rules_.seed, wave_.number, Purpose::leads));
    const auto most = std::max_element(shares.begin(), shares.end());
    const auto at = static_cast<std::size_t>(most - shares.begin());
    const auto& entry = entries_.entries[wave_.entries[at]];
    Origin origin;
    origin.number = 1;
    origin.probability = *most;
    origin.nucleus = entry.nucleus;
    origin.x_um = entry.x_um;
    origin.y_um = entry.y_um;
    origin.along_um = entry.along_um;
    origin.across_um = entry.across_um;
    origin.entry_min = entry.time_min;
    origin.basin_nuclei = static_cast<int>(wave_.entries.size());
    origin.site = site_of_arrival(static_cast<int>(at));
    wave_.origins.push_back(origin);
  }

  void claim() {
    if (wave_.fate == Fate::terminal) return;
    const bool one = wave_.answer == Answer::single;
    if (!one && wave_.answer != Answer::coexisting) return;
    for (auto& origin : wave_.origins) {
      origin.claimed = one ? origin.number == 1 : origin.probability >= 0.5;
      if (!origin.claimed) continue;
      const bool first = origin.number == 1;
      wave_.site = first || wave_.site == origin.site ? std::optional(origin.site) : std::nullopt;
    }
  }

  /// Waves of death and waves without a front have no speed; of those too fast to see it is known
  /// from which on.
  void drop_speeds() {
    const bool flat = wave_.answer == Answer::synchronous;
    if (wave_.fate != Fate::terminal && !flat && wave_.answer != Answer::incoherent) return;
    wave_.slowness.reset();
    wave_.fronts.clear();
    if (flat && wave_.fate != Fate::terminal) set_lowest_speed();
  }

  void set_lowest_speed() {
    const auto flat = flat_slowness(arrivals_, fit_.astray, fit_.jitter_min);
    auto slowness = slowness_with_speed(flat.min_per_um, flat.se_min_per_um);
    slowness.speed_um_per_min.reset();
    slowness.speed_hi_um_per_min.reset();
    wave_.slowness = slowness;
  }

  void add_markers() {
    const MarkerView markers{&wave_,       &entries_,         view_.interphases,
                             view_.nuclei, view_.territories, view_.chronology};
    for (auto& origin : wave_.origins) {
      const auto at = std::find_if(wave_.entries.begin(), wave_.entries.end(), [&](int one) {
        return entries_.entries[one].nucleus == origin.nucleus;
      });
      const auto leader = static_cast<int>(at - wave_.entries.begin());
      const auto& found = findings_.candidates.found;
      std::vector<int> basin;
      if (static_cast<std::size_t>(origin.number) <= found.size())
        basin = found[origin.number - 1].basin;
      set_markers(origin, leader, basin, markers);
    }
  }

  /// A nucleus lost in the interphase before this wave next to a claimed origin may have led.
  void add_lost_near_origin() {
    for (const auto& origin : wave_.origins) {
      if (!origin.claimed) continue;
      for (const auto& interphase : view_.interphases->interphases) {
        if (interphase.outcome != Outcome::lost) continue;
        const double away =
            std::hypot(interphase.place_um.x - origin.x_um, interphase.place_um.y - origin.y_um);
        if (away > 1.5 * spacing() || !lost_before_wave(interphase)) continue;
        wave_.reasons.push_back("lost-near-origin");
        wave_.reason_details.push_back("Nucleus " + std::to_string(interphase.nucleus) +
                                       " was lost beside the origin shortly before the wave.");
        wave_.review = true;
        return;
      }
    }
  }

  bool lost_before_wave(const Interphase& interphase) const {
    const double half = view_.fields->period_min / 2;
    for (const auto& nucleus : view_.nuclei->nuclei) {
      if (nucleus.id != interphase.nucleus) continue;
      double last = -1e300;
      for (const auto& point : nucleus.points)
        if (point.frame <= interphase.last_frame) last = std::max(last, point.time_min);
      return last > wave_.start_min - half && last < wave_.end_min;
    }
    return false;
  }

  Wave& wave_;
  WaveEntries& entries_;
  const OriginView& view_;
  const OriginRules& rules_;
  double trend_;
  const Arrivals& arrivals_;
  const SourceFit& fit_;
  const std::vector<Link>& links_;
  const Candidates& candidates_;
  Findings findings_;
};

}  // namespace

void find_origins(Waves& waves, WaveEntries& entries, const OriginView& view,
                  const OriginRules& rules) {
  const double trend = trend_sd(*view.fields);
  for (std::size_t i = 0; i < waves.waves.size(); ++i)
    WaveOrigins(waves.waves[i], i, entries, view, rules, trend).run();
  for (auto& entry : entries.entries)
    if (entry.wave == 0) entry.timing = entry.cycle == 0 ? Timing::out_of_step : Timing::alone;
}

}  // namespace wavefount
