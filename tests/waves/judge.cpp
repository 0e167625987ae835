#include "judge.h"

#include <chrono>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <set>

#include "wavefount/core/robust.h"
#include "wavefount/waves/find_waves.h"
#include "wavefount/waves/numbering.h"
#include "wavefount/waves/order.h"
#include "wavefount/waves/origins.h"
#include "wavefount/waves/territories.h"

namespace wavefount::testing {
namespace {

/// Found wave that shares most entries with the true one, if by more than half of each.
const Wave* match(const TrueWave& truth, const Measured& measured) {
  const std::set<int> wanted(truth.interphases.begin(), truth.interphases.end());
  for (const auto& wave : measured.waves.waves) {
    std::size_t common = 0;
    for (const int entry : wave.entries)
      common += wanted.contains(measured.entries.entries[entry].interphase);
    if (2 * common > wanted.size() && 2 * common > wave.entries.size()) return &wave;
  }
  return nullptr;
}

double off(const Origin& origin, Point source) {
  return std::hypot(origin.x_um - source.x, origin.y_um - source.y);
}

bool near_any(const Origin& origin, const std::vector<Point>& sources, double reach) {
  for (const auto& source : sources)
    if (off(origin, source) <= reach) return true;
  return false;
}

void judge_speed(const TrueWave& truth, const Wave& wave, Tally& tally) {
  if (truth.slowness_min_per_um <= 0) return;
  ++tally.travelling;
  if (!wave.slowness || !wave.slowness->speed_um_per_min) return;
  ++tally.with_speed;
  const auto& slowness = *wave.slowness;
  const double error = slowness.min_per_um - truth.slowness_min_per_um;
  tally.slowness_covered += std::abs(error) <= 1.96 * slowness.se_min_per_um;
  tally.speed_errors.push_back(*slowness.speed_um_per_min * truth.slowness_min_per_um - 1);
}

void judge_origins(const Scene& scene, const TrueWave& truth, const Wave& wave, Tally& tally) {
  const double reach = 1.2 * scene.spacing_um;
  for (const auto& source : truth.sources_um) {
    ++tally.sources;
    bool named = false;
    for (const auto& origin : wave.origins)
      named = named || (origin.claimed && off(origin, source) <= reach);
    ++(named ? tally.right : tally.missed);
  }
  for (const auto& origin : wave.origins) {
    const bool true_one = near_any(origin, truth.sources_um, reach);
    tally.invented += origin.claimed && !true_one;
    tally.claims_unfounded += origin.claimed && truth.sources_um.empty();
    if (wave.answer == Answer::too_few || wave.answer == Answer::enters_view) continue;
    const auto decile = std::min(9, static_cast<int>(10 * origin.probability));
    ++tally.candidates[decile];
    tally.true_candidates[decile] += true_one;
  }
}

double arm_z(const Wave& wave, const TrueWave& truth) {
  const auto mean = mean_slowness(wave.fronts);
  return mean ? (mean->min_per_um - truth.slowness_min_per_um) / mean->se_min_per_um : 0;
}

void print_wave(const Scene& scene, const TrueWave& truth, const Wave& wave,
                const ArrivalFields& fields) {
  const auto& fit = fields.fits[wave.number - 1];
  std::printf(
      "  wave %d n %zu %s jitter %.2f speed %.1f (true %.1f, z %.1f; order %.3f z2 %.1f); true at",
      wave.number, wave.entries.size(), name_of(wave.answer).c_str(), wave.jitter_min,
      wave.slowness ? 1 / wave.slowness->min_per_um : 0.0, 1 / truth.slowness_min_per_um,
      wave.slowness
          ? (wave.slowness->min_per_um - truth.slowness_min_per_um) / wave.slowness->se_min_per_um
          : 0.0,
      order_p_value(fields.arrivals[wave.number - 1], fit.astray, fields.links[wave.number - 1],
                    999, 1),
      arm_z(wave, truth));
  for (const auto& source : truth.sources_um) std::printf(" (%.0f %.0f)", source.x, source.y);
  std::printf("; spacing %.0f; found", scene.spacing_um);
  for (const auto& origin : wave.origins)
    std::printf(" (%.0f %.0f p %.2f%s prom %.1f)", origin.x_um, origin.y_um, origin.probability,
                origin.claimed ? " claimed" : "", origin.prominence_min.value_or(0));
  for (const auto& reason : wave.reasons) std::printf(" %s", reason.c_str());
  std::printf("\n");
}

}  // namespace

Measured measure(const Scene& scene, std::uint64_t seed) {
  const auto begin = std::chrono::steady_clock::now();
  Measured measured;
  const auto territories =
      measure_territories(scene.nuclei, scene.tube, spread_moments(scene.times_min));
  auto& entries = measured.entries;
  entries = entries_of(scene.interphases, scene.tube, {});
  const auto chronology =
      chronology_of(entries.entries, scene.nuclei, scene.interphases, scene.tube, territories, {});
  const auto cycles = cycle_numbers(entries.entries, chronology);
  for (std::size_t i = 0; i < cycles.size(); ++i) entries.entries[i].cycle = cycles[i];
  WaveRules rules;
  rules.least_se_min = 0.015;
  rules.seed = seed;
  rules.film_end_min = scene.times_min.back();
  auto found =
      find_waves(entries, {&scene.tube, &scene.interphases, &scene.nuclei, &chronology}, rules);
  measured.waves = std::move(found.waves);
  OriginRules origin_rules;
  origin_rules.frame_interval_min = 0.5;
  origin_rules.film_start_min = scene.times_min.front();
  origin_rules.seed = seed;
  find_origins(
      measured.waves, entries,
      {&scene.tube, &scene.interphases, &scene.nuclei, &territories, &chronology, &found.fields},
      origin_rules);
  measured.fields = std::move(found.fields);
  measured.seconds =
      std::chrono::duration<double>(std::chrono::steady_clock::now() - begin).count();
  return measured;
}

void judge(const Scene& scene, const Measured& measured, Tally& tally) {
  ++tally.scenes;
  tally.seconds += measured.seconds;
  int matched = 0;
  for (const auto& truth : scene.waves) {
    ++tally.waves;
    const auto* wave = match(truth, measured);
    if (wave == nullptr) {
      tally.sources += static_cast<int>(truth.sources_um.size());
      tally.missed += static_cast<int>(truth.sources_um.size());
      tally.travelling += truth.slowness_min_per_um > 0;
      continue;
    }
    ++matched;
    if (std::getenv("WAVEFOUNT_WAVE_DETAIL") != nullptr)
      print_wave(scene, truth, *wave, measured.fields);
    ++tally.answers[static_cast<std::size_t>(wave->answer)];
    judge_speed(truth, *wave, tally);
    judge_origins(scene, truth, *wave, tally);
  }
  tally.found += matched;
  tally.spurious += static_cast<int>(measured.waves.waves.size()) - matched;
}

void add(const Tally& tally, Tally& total) {
  total.scenes += tally.scenes;
  total.waves += tally.waves;
  total.found += tally.found;
  total.spurious += tally.spurious;
  total.travelling += tally.travelling;
  total.with_speed += tally.with_speed;
  total.slowness_covered += tally.slowness_covered;
  total.speed_errors.insert(total.speed_errors.end(), tally.speed_errors.begin(),
                            tally.speed_errors.end());
  total.sources += tally.sources;
  total.right += tally.right;
  total.missed += tally.missed;
  total.invented += tally.invented;
  total.claims_unfounded += tally.claims_unfounded;
  for (std::size_t i = 0; i < total.answers.size(); ++i) total.answers[i] += tally.answers[i];
  for (std::size_t i = 0; i < total.candidates.size(); ++i) {
    total.candidates[i] += tally.candidates[i];
    total.true_candidates[i] += tally.true_candidates[i];
  }
  total.seconds += tally.seconds;
}

void print_reliability(const Tally& tally) {
  for (std::size_t i = 0; i < tally.candidates.size(); ++i)
    if (tally.candidates[i] > 0)
      std::printf("candidates with a probability of 0.%zu to 0.%zu: %d, true %.3f\n", i, i + 1,
                  tally.candidates[i],
                  static_cast<double>(tally.true_candidates[i]) / tally.candidates[i]);
}

void print(const std::string& name, const Tally& tally) {
  std::vector<double> absolute;
  for (const double error : tally.speed_errors) absolute.push_back(std::abs(error));
  std::printf("%-28s waves %d/%d +%d | speed %d/%d bias %+.1f%% median %.1f%% cover %.1f%% | ",
              name.c_str(), tally.found, tally.waves, tally.spurious, tally.with_speed,
              tally.travelling, 100 * median(tally.speed_errors), 100 * median(absolute),
              100.0 * tally.slowness_covered / std::max(tally.with_speed, 1));
  std::printf("origins right %d/%d missed %d invented %d unfounded %d | answers", tally.right,
              tally.sources, tally.missed, tally.invented, tally.claims_unfounded);
  for (std::size_t i = 0; i < tally.answers.size(); ++i)
    if (tally.answers[i] > 0)
      std::printf(" %s:%d", name_of(static_cast<Answer>(i)).c_str(), tally.answers[i]);
  std::printf(" | %.2f s a scene\n", tally.seconds / std::max(tally.scenes, 1));
}

}  // namespace wavefount::testing
