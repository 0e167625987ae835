#include <cmath>

#include "pair_up.h"
#include "score_parts.h"

namespace wavefount {
namespace {

constexpr double two_sided_95 = 1.96;
// Farther than this in time an entry is not the one it stands beside.
constexpr double reach_frames = 3;
constexpr double least_reach_min = 3;
constexpr double reach_radii = 1.5;
constexpr double least_reach_um = 20;

void count_interval(double error, const std::optional<double>& se, Share& intervals) {
  if (se && *se > 0) intervals.count(std::abs(error) <= two_sided_95 * *se);
}

void score_import(const TruthEntry& truth, const ResultEntry& result, FilmScore& score) {
  if (!truth.seen) return;
  score.rates.count(result.import_rate.has_value());
  if (result.import_rate) {
    const double error = *result.import_rate - truth.import_rate;
    score.rate_errors.push_back(error / truth.import_rate);
    count_interval(error, result.import_rate_se, score.rate_intervals);
  }
  if (result.import_initial) {
    const double error = *result.import_initial - truth.import_initial;
    score.initial_errors.push_back(error / truth.import_initial);
    count_interval(error, result.import_initial_se, score.initial_intervals);
  }
}

}  // namespace

EntryMatches match_entries(const TruthFilm& truth, const ResultFilm& result) {
  const double reach_min = std::max(reach_frames * truth.interval_min, least_reach_min);
  return pair_up(result.entries.size(), truth.entries.size(),
                 [&](std::size_t i, std::size_t j) -> std::optional<double> {
                   const auto& claimed = result.entries[i];
                   const auto& real = truth.entries[j];
                   const double late = std::abs(claimed.entry_min - real.entry_min);
                   const double distance = std::hypot(claimed.place_um.x - real.place_um.x,
                                                      claimed.place_um.y - real.place_um.y);
                   const double reach = std::max(reach_radii * real.radius_um, least_reach_um);
                   if (!real.entered || late > reach_min || distance > reach) return std::nullopt;
                   return late / reach_min + distance / reach;
                 });
}

void score_entries(const TruthFilm& truth, const ResultFilm& result, const EntryMatches& matches,
                   FilmScore& score) {
  std::vector<bool> found(truth.entries.size(), false);
  for (std::size_t i = 0; i < matches.size(); ++i) {
    const auto& claimed = result.entries[i];
    if (!matches[i]) {
      ++score.entries_invented;
      continue;
    }
    const auto& real = truth.entries[*matches[i]];
    if (!real.counts) continue;
    found[*matches[i]] = true;
    const double error = claimed.entry_min - real.entry_min;
    score.entry_errors.push_back(error / truth.interval_min);
    count_interval(error, claimed.entry_se, score.entry_intervals);
    score_import(real, claimed, score);
  }
  for (std::size_t j = 0; j < truth.entries.size(); ++j)
    if (truth.entries[j].counts) score.entries.count(found[j]);
}

}  // namespace wavefount
