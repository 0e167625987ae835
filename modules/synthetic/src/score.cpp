#include "wavefount/synthetic/score.h"

#include "score_parts.h"

namespace wavefount {
namespace {

void append(std::vector<double>& values, const std::vector<double>& more) {
  values.insert(values.end(), more.begin(), more.end());
}

void append(Share& share, const Share& more) {
  share.hit += more.hit;
  share.of += more.of;
}

FilmScore score_film(const TruthFilm& truth, const ResultFilm& result) {
  FilmScore score;
  score.name = truth.name;
  const auto matches = match_entries(truth, result);
  score_nuclei(truth, result, score);
  score_entries(truth, result, matches, score);
  score_waves(truth, result, matches, score);
  return score;
}

}  // namespace

std::optional<double> Share::value() const {
  if (of == 0) return std::nullopt;
  return static_cast<double>(hit) / static_cast<double>(of);
}

void FilmScore::add(const FilmScore& other) {
  nuclei_found += other.nuclei_found;
  nuclei_missed += other.nuclei_missed;
  nuclei_invented += other.nuclei_invented;
  entries_invented += other.entries_invented;
  waves_invented += other.waves_invented;
  origins_right += other.origins_right;
  origins_missed += other.origins_missed;
  origins_invented += other.origins_invented;
  for (const auto member :
       {&FilmScore::links, &FilmScore::identities, &FilmScore::entries, &FilmScore::entry_intervals,
        &FilmScore::rates, &FilmScore::rate_intervals, &FilmScore::initial_intervals,
        &FilmScore::waves, &FilmScore::fates, &FilmScore::speeds, &FilmScore::speed_intervals,
        &FilmScore::origin_waves, &FilmScore::sites})
    append(this->*member, other.*member);
  for (const auto member : {&FilmScore::entry_errors, &FilmScore::rate_errors,
                            &FilmScore::initial_errors, &FilmScore::speed_errors})
    append(this->*member, other.*member);
  for (const auto& [pair, count] : other.answers) answers[pair] += count;
}

ScoreReport score_results(const std::filesystem::path& results,
                          const std::filesystem::path& truth) {
  ScoreReport report;
  const auto films = read_truth(truth);
  const auto measured = read_results(results, films, report.notes);
  report.all.name = "all";
  for (const auto& film : films) {
    const auto found = measured.find(film.name);
    auto score = score_film(film, found == measured.end() ? ResultFilm{} : found->second);
    score.has_results = found != measured.end();
    report.all.add(score);
    report.films.push_back(std::move(score));
  }
  return report;
}

}  // namespace wavefount
