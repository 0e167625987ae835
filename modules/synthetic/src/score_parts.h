#pragma once

#include <optional>
#include <vector>

#include "score_tables.h"
#include "wavefount/synthetic/score.h"

namespace wavefount {

/// Detection and linking.
void score_nuclei(const TruthFilm& truth, const ResultFilm& result, FilmScore& score);

/// For each result entry the index of the true entry it is, where it is one.
using EntryMatches = std::vector<std::optional<std::size_t>>;
EntryMatches match_entries(const TruthFilm& truth, const ResultFilm& result);

/// Entry times and import.
void score_entries(const TruthFilm& truth, const ResultFilm& result, const EntryMatches& matches,
                   FilmScore& score);

/// Waves, speeds, origins and answers.
void score_waves(const TruthFilm& truth, const ResultFilm& result, const EntryMatches& matches,
                 FilmScore& score);

}  // namespace wavefount
