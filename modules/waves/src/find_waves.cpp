#include "wavefount/waves/find_waves.h"

#include <algorithm>
#include <cmath>

#include "wavefount/core/robust.h"
#include "wavefount/waves/fate.h"
#include "wavefount/waves/fronts.h"
#include "wavefount/waves/grouping.h"

namespace wavefount {
namespace {

bool healthy(double time_min, const FilmOverrides& overrides) {
  return !(overrides.first_healthy_min && time_min < *overrides.first_healthy_min) &&
         !(overrides.last_healthy_min && time_min > *overrides.last_healthy_min);
}

bool usable(const Interphase& interphase) {
  return std::isfinite(interphase.entry->time_min) && std::isfinite(interphase.place_um.x) &&
         std::isfinite(interphase.place_um.y);
}

double usual_period(const Waves& waves, const Chronology& chronology) {
  std::vector<double> periods;
  for (const auto& wave : waves.waves)
    if (wave.period_min) periods.push_back(*wave.period_min);
  if (!periods.empty()) return median(std::move(periods));
  // Nothing repeats: the usual length of a cycle in extract stands for it.
  constexpr double usual_min = 30;
  return chronology.period.known() ? chronology.period.at(0) : usual_min;
}

/// Basins as the fronts want them: positions of sources; all to the only source where no draws
/// tell them apart.
std::vector<int> basins_of(const Candidates& candidates, std::size_t sources, std::size_t count) {
  auto basin = candidates.basin;
  if (basin.empty() || sources == 1) basin.assign(count, 0);
  return basin;
}

void measure_front(Wave& wave, std::size_t at, const WaveView& view, const ArrivalFields& fields) {
  const auto& arrivals = fields.arrivals[at];
  const auto& fit = fields.fits[at];
  const auto count = arrivals.times_min.size();
  const auto sources = sources_of(arrivals, fields.candidates[at], *view.tube, fields.wide);
  std::vector<std::vector<int>> neighbours(count);
  for (const auto& link : fields.links[at]) {
    neighbours[link.a].push_back(link.b);
    neighbours[link.b].push_back(link.a);
  }
  const FrontView front_view{&arrivals, &fit,
                             basins_of(fields.candidates[at], sources.size(), count),
                             std::move(neighbours), fields.spacing_um};
  wave.fronts = measure_fronts(sources, front_view);
  // With draws: over the whole stretch of nuclei at once, source and collisions included.
  wave.slowness =
      fit.draws.empty()
          ? mean_slowness(wave.fronts)
          : std::optional(slowness_with_speed(fit.slowness_min_per_um, fit.slowness_se_min_per_um));
  wave.jitter_min = fit.jitter_min;
}

}  // namespace

WaveEntries entries_of(const Interphases& interphases, const Tube& tube,
                       const FilmOverrides& overrides) {
  WaveEntries entries;
  for (int i = 0; i < static_cast<int>(interphases.interphases.size()); ++i) {
    const auto& interphase = interphases.interphases[i];
    if (!interphase.entry || interphase.outcome != Outcome::entered) continue;
    if (!usable(interphase) || !healthy(interphase.entry->time_min, overrides)) continue;
    WaveEntry entry;
    entry.interphase = i;
    entry.nucleus = interphase.nucleus;
    entry.time_min = interphase.entry->time_min;
    entry.se_min = std::isfinite(interphase.entry->se_min) ? interphase.entry->se_min : 0;
    entry.x_um = interphase.place_um.x;
    entry.y_um = interphase.place_um.y;
    const bool has_axis = tube.axis_um.size() >= 2;
    const auto place = tube.place(interphase.place_um);
    entry.along_um = has_axis ? place.along_um : entry.x_um;
    entry.across_um = has_axis ? place.across_um : entry.y_um;
    entries.entries.push_back(entry);
  }
  return entries;
}

FoundWaves find_waves(WaveEntries& entries, const WaveView& view, const WaveRules& rules) {
  FoundWaves found;
  const auto& chronology = *view.chronology;
  found.waves = group_waves(entries, *view.tube, chronology, rules.neighbours);
  measure_periods(found.waves, entries, chronology);
  auto& fields = found.fields;
  fields.spacing_um = chronology.spacing_um;
  fields.wide = is_wide(*view.tube, chronology.spacing_um, entries);
  fields.line = is_line(*view.tube, chronology.spacing_um, fields.wide);
  fields.period_min = usual_period(found.waves, chronology);
  for (const auto& wave : found.waves.waves) {
    fields.arrivals.push_back(arrivals_of(wave, entries, fields.line, rules.least_se_min));
    fields.links.push_back(
        wave_links(wave.entries, entries, *view.tube, chronology, rules.neighbours));
    const auto doubt = number_doubt(wave, entries, chronology);
    fields.steepness.push_back(doubt.steepness);
    fields.contradicting_share.push_back(doubt.contradicting_share);
  }
  const auto region = source_region(*view.tube, fields.arrivals, fields.spacing_um, fields.line);
  fields.fits = fit_sources(fields.arrivals, region, {rules.draws, fields.period_min, rules.seed});
  const FateRules fate{rules.film_end_min, chronology.spacing_um, rules.longest_mitosis_min};
  for (std::size_t i = 0; i < found.waves.waves.size(); ++i) {
    auto& wave = found.waves.waves[i];
    auto& jitter = fields.fits[i].jitter_min;
    if (jitter <= 0) jitter = rules.unseen_jitter_min;
    fields.candidates.push_back(find_candidates(fields.arrivals[i], fields.fits[i], fields.links[i],
                                                {fields.spacing_um, view.tube, fields.wide}));
    wave.fate = fate_of(wave, entries, *view.interphases, *view.nuclei, *view.tube, fate);
    measure_front(wave, i, view, fields);
  }
  return found;
}

std::vector<double> spread_moments(const std::vector<double>& times_min) {
  constexpr int moments = 15;
  std::vector<double> spread;
  for (int i = 0; i < moments && !times_min.empty(); ++i)
    spread.push_back(quantile(times_min, (i + 0.5) / moments));
  return spread;
}

}  // namespace wavefount
