#include "wavefount/waves/find_waves.h"

#include <algorithm>
#include <cmath>

#include "wavefount/core/robust.h"
#include "wavefount/waves/candidates.h"
#include "wavefount/waves/fate.h"
#include "wavefount/waves/fronts.h"
#include "wavefount/waves/grouping.h"

namespace wavefount {
namespace {

bool healthy(double time_min, const FilmOverrides& overrides) {
  return !(overrides.first_healthy_min && time_min < *overrides.first_healthy_min) &&
         !(overrides.last_healthy_min && time_min > *overrides.last_healthy_min);
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

void measure_front(Wave& wave, std::size_t at, const WaveView& view, const ArrivalFields& fields) {
  const auto& arrivals = fields.arrivals[at];
  const auto& fit = fields.fits[at];
  const auto sources =
      mean_sources(arrivals, fit, fields.links[at], *view.tube, fields.wide, fields.spacing_um);
  FrontView front_view{
      &arrivals,      &fit.astray,
      sources.basin,  field_graph(arrivals.places_um.size(), fields.links[at]).neighbours,
      fit.jitter_min, fields.spacing_um,
      fields.wide};
  wave.fronts = measure_fronts(sources.sources, front_view);
  wave.slowness = mean_slowness(wave.fronts);
  wave.jitter_min = fit.jitter_min;
}

}  // namespace

WaveEntries entries_of(const Interphases& interphases, const Tube& tube,
                       const FilmOverrides& overrides) {
  WaveEntries entries;
  for (int i = 0; i < static_cast<int>(interphases.interphases.size()); ++i) {
    const auto& interphase = interphases.interphases[i];
    if (!interphase.entry || interphase.outcome != Outcome::entered) continue;
    if (!std::isfinite(interphase.entry->time_min) ||
        !healthy(interphase.entry->time_min, overrides))
      continue;
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
  fields.period_min = usual_period(found.waves, chronology);
  for (const auto& wave : found.waves.waves) {
    fields.arrivals.push_back(arrivals_of(wave, entries, *view.tube, chronology.spacing_um,
                                          fields.wide, rules.least_se_min));
    fields.links.push_back(
        wave_links(wave.entries, entries, *view.tube, chronology, rules.neighbours));
    const auto doubt = number_doubt(wave, entries, chronology);
    fields.steepness.push_back(doubt.steepness);
    fields.contradicting_share.push_back(doubt.contradicting_share);
  }
  fields.fits = fit_fields(fields.arrivals, fields.spacing_um, fields.period_min);
  const FateRules fate{rules.film_end_min, chronology.spacing_um, rules.longest_mitosis_min};
  for (std::size_t i = 0; i < found.waves.waves.size(); ++i) {
    auto& wave = found.waves.waves[i];
    auto& jitter = fields.fits[i].jitter_min;
    if (jitter <= 0) jitter = rules.unseen_jitter_min;
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
