#include <cmath>
#include <limits>
#include <map>
#include <set>

#include "score_parts.h"

namespace wavefount {
namespace {

// A wave of fewer entries that count is neither asked for nor held against.
constexpr int least_nuclei = 3;

using WaveKey = std::pair<int, int>;  // tube or acquisition, wave

/// How the entries of result waves fall on true waves.
struct Overlap {
  std::map<WaveKey, std::map<WaveKey, int>> shared;  ///< by true wave, by result wave
  std::map<WaveKey, int> matched;                    ///< of each result wave, entries that are real
  std::map<WaveKey, std::optional<WaveKey>> best;    ///< true wave of most of its entries
};

Overlap overlap_of(const TruthFilm& truth, const ResultFilm& result, const EntryMatches& matches) {
  Overlap overlap;
  std::map<WaveKey, std::map<WaveKey, int>> by_result;
  for (std::size_t i = 0; i < matches.size(); ++i) {
    const auto& claimed = result.entries[i];
    if (!claimed.wave || !matches[i]) continue;
    const auto& real = truth.entries[*matches[i]];
    const WaveKey key{claimed.key.acquisition, *claimed.wave};
    ++overlap.matched[key];
    if (!real.wave) continue;
    const WaveKey true_key{real.tube, *real.wave};
    ++by_result[key][true_key];
    if (real.counts) ++overlap.shared[true_key][key];
  }
  for (const auto& [key, counts] : by_result) {
    int most = 0;
    for (const auto& [true_key, count] : counts) {
      if (count <= most) continue;
      most = count;
      overlap.best[key] = true_key;
    }
  }
  return overlap;
}

class WaveScorer {
 public:
  WaveScorer(const TruthFilm& truth, const ResultFilm& result, const EntryMatches& matches,
             FilmScore& score)
      : truth_(truth),
        result_(result),
        overlap_(overlap_of(truth, result, matches)),
        score_(score) {}

  void run() {
    for (const auto& wave : truth_.waves) score_true_wave(wave);
    for (const auto& wave : result_.waves) score_unpaired(wave);
  }

 private:
  /// The result wave that holds at least half of the true wave's entries, most of its own from it.
  const ResultWave* partner(const TruthWaveRow& wave) const {
    const auto shared = overlap_.shared.find({wave.tube, wave.wave});
    if (shared == overlap_.shared.end()) return nullptr;
    for (const auto& candidate : result_.waves) {
      const WaveKey key{candidate.acquisition, candidate.wave};
      const auto count = shared->second.find(key);
      if (count == shared->second.end() || 2 * count->second < wave.nuclei) continue;
      if (2 * count->second >= overlap_.matched.at(key)) return &candidate;
      // Entries at the film's edge do not count but belong to the wave all the same.
      if (overlap_.best.at(key) == WaveKey{wave.tube, wave.wave}) return &candidate;
    }
    return nullptr;
  }

  void score_true_wave(const TruthWaveRow& wave) {
    const auto* found = partner(wave);
    if (found) paired_.insert({found->acquisition, found->wave});
    if (wave.nuclei >= least_nuclei) {
      score_.waves.count(found != nullptr);
      if (!wave.answer.empty())
        ++score_.answers[{wave.answer, found ? found->answer : std::string("not found")}];
    }
    if (found) score_.fates.count(found->fate == wave.fate);
    if (found && wave.travelling) score_speed(wave, *found);
    score_origins(wave, found);
  }

  void score_speed(const TruthWaveRow& wave, const ResultWave& found) {
    if (!wave.speed) return;
    score_.speeds.count(found.speed.has_value());
    if (found.speed) score_.speed_errors.push_back(*found.speed / *wave.speed - 1);
    if (!found.speed_lo) return;
    const double top = found.speed_hi.value_or(std::numeric_limits<double>::infinity());
    score_.speed_intervals.count(*found.speed_lo <= *wave.speed && *wave.speed <= top);
  }

  void score_origins(const TruthWaveRow& wave, const ResultWave* found) {
    std::vector<const TruthOriginRow*> real;
    for (const auto& origin : truth_.origins)
      if (origin.tube == wave.tube && origin.wave == wave.wave && origin.in_view)
        real.push_back(&origin);
    std::set<const TruthOriginRow*> right;
    const long invented_before = score_.origins_invented;
    for (const auto& claim : result_.origins)
      if (found && claim.acquisition == found->acquisition && claim.wave == found->wave)
        score_claim(wave, claim, real, right);
    bool all = true;
    bool asked = false;
    for (const auto* origin : real) {
      if (!origin->judged) continue;
      asked = true;
      all = all && right.count(origin);
      ++(right.count(origin) ? score_.origins_right : score_.origins_missed);
    }
    if (asked) score_.origin_waves.count(all && score_.origins_invented == invented_before);
  }

  void score_claim(const TruthWaveRow& wave, const ResultOrigin& claim,
                   const std::vector<const TruthOriginRow*>& real,
                   std::set<const TruthOriginRow*>& right) {
    const bool none_to_claim = wave.answer == "enters-view" || wave.answer == "synchronous";
    const TruthOriginRow* nearest = nullptr;
    double least = truth_.spacing_um.at(static_cast<std::size_t>(wave.tube));
    for (const auto* origin : real) {
      const double distance =
          std::hypot(claim.place_um.x - origin->place_um.x, claim.place_um.y - origin->place_um.y);
      if (distance > least) continue;
      least = distance;
      nearest = origin;
    }
    if (none_to_claim || !nearest || (nearest->judged && right.count(nearest))) {
      ++score_.origins_invented;
      return;
    }
    if (!nearest->judged) return;
    right.insert(nearest);
    score_.sites.count(claim.site == nearest->site);
  }

  void score_unpaired(const ResultWave& wave) {
    const WaveKey key{wave.acquisition, wave.wave};
    if (paired_.count(key)) return;
    if (!negligible(key)) {
      ++score_.waves_invented;
      ++score_.answers[{"none", wave.answer}];
    }
    for (const auto& claim : result_.origins)
      if (claim.acquisition == wave.acquisition && claim.wave == wave.wave)
        ++score_.origins_invented;
  }

  /// A result wave of true entries at the edge of the film, of which nothing is asked.
  bool negligible(const WaveKey& key) const {
    const auto best = overlap_.best.find(key);
    if (best == overlap_.best.end() || !best->second) {
      const auto matched = overlap_.matched.find(key);
      return matched != overlap_.matched.end() && matched->second > 0;
    }
    for (const auto& wave : truth_.waves)
      if (WaveKey{wave.tube, wave.wave} == *best->second) return wave.nuclei < least_nuclei;
    return true;
  }

  const TruthFilm& truth_;
  const ResultFilm& result_;
  const Overlap overlap_;
  FilmScore& score_;
  std::set<WaveKey> paired_;
};

}  // namespace

void score_waves(const TruthFilm& truth, const ResultFilm& result, const EntryMatches& matches,
                 FilmScore& score) {
  WaveScorer(truth, result, matches, score).run();
}

}  // namespace wavefount
