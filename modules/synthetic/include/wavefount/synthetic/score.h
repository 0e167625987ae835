#pragma once

#include <filesystem>
#include <iosfwd>
#include <map>
#include <optional>
#include <string>
#include <utility>
#include <vector>

namespace wavefount {

/// So many of so many.
struct Share {
  long hit = 0;
  long of = 0;
  void count(bool right) {
    hit += right ? 1 : 0;
    ++of;
  }
  std::optional<double> value() const;  ///< empty where there was nothing to count
};

/// How the results of one film, or of all, stand against the truth.
struct FilmScore {
  std::string name;
  bool has_results = true;

  // Detection, summed over frames. What is faint in truth is neither asked for nor held against.
  long nuclei_found = 0, nuclei_missed = 0, nuclei_invented = 0;
  Share links;       ///< true steps from frame to frame on which the identity was kept
  Share identities;  ///< nuclei that kept their identity through a mitosis

  Share entries;  ///< true entries that were found
  long entries_invented = 0;
  std::vector<double> entry_errors;  ///< measured less true, in frame intervals
  Share entry_intervals;             ///< intervals ± 1.96 se that hold the truth

  Share rates;                      ///< interphases seen from formation to entry that got a rate
  std::vector<double> rate_errors;  ///< relative
  Share rate_intervals;
  std::vector<double> initial_errors;  ///< relative, of the initial import
  Share initial_intervals;

  Share waves;  ///< true waves that were found
  long waves_invented = 0;
  Share fates;                       ///< found waves whose fate was named right
  Share speeds;                      ///< found travelling waves that got a speed
  std::vector<double> speed_errors;  ///< relative
  Share speed_intervals;

  long origins_right = 0, origins_missed = 0, origins_invented = 0;
  Share origin_waves;  ///< waves with a visible origin, all of them right and nothing else claimed
  Share sites;         ///< right origins whose site was named right
  /// How often a wave of this true answer got that answer; `none` for a wave that is not there.
  std::map<std::pair<std::string, std::string>, long> answers;

  void add(const FilmScore& other);
};

/// One figure of a score, with the name used in CSV and JSON.
struct Figure {
  std::string name;
  std::string sentence;         ///< what it says
  std::optional<double> value;  ///< empty where nothing could be counted
  bool percent = false;         ///< shown as a percentage
};
std::vector<Figure> figures(const FilmScore& score);

struct ScoreReport {
  std::vector<FilmScore> films;
  FilmScore all;
  std::vector<std::string> notes;  ///< films without truth, tables that are not there
};

/// Holds the tables in `results` (the contract's, those at its root or else those in its folders)
/// against a truth folder that write_demo made. Throws Problem when one of them cannot be read.
ScoreReport score_results(const std::filesystem::path& results, const std::filesystem::path& truth);

/// For a person to read.
void print(const ScoreReport& report, std::ostream& out);
/// One row a film and one for all, a column a figure.
void write_score_csv(const ScoreReport& report, const std::filesystem::path& file);
/// The same with the table of answers, as JSON text.
std::string score_json(const ScoreReport& report);

}  // namespace wavefount
