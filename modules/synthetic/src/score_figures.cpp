#include <algorithm>
#include <cmath>

#include "wavefount/core/robust.h"
#include "wavefount/synthetic/score.h"

namespace wavefount {
namespace {

std::optional<double> ratio(long part, long whole) {
  if (whole == 0) return std::nullopt;
  return static_cast<double>(part) / static_cast<double>(whole);
}

std::optional<double> f1(const FilmScore& score) {
  return ratio(2 * score.nuclei_found,
               2 * score.nuclei_found + score.nuclei_missed + score.nuclei_invented);
}

std::vector<double> sizes(std::vector<double> values) {
  for (auto& value : values) value = std::abs(value);
  return values;
}

std::optional<double> middle(const std::vector<double>& values) {
  if (values.empty()) return std::nullopt;
  return median(values);
}

std::optional<double> high(const std::vector<double>& values) {
  if (values.empty()) return std::nullopt;
  return quantile(values, 0.95);
}

class Figures {
 public:
  void count(const std::string& name, const std::string& sentence, long value) {
    all.push_back({name, sentence, static_cast<double>(value), false});
  }
  void percent(const std::string& name, const std::string& sentence, std::optional<double> value) {
    all.push_back({name, sentence, value, true});
  }
  void number(const std::string& name, const std::string& sentence, std::optional<double> value) {
    all.push_back({name, sentence, value, false});
  }
  std::vector<Figure> all;
};

void nuclei_figures(const FilmScore& s, Figures& f) {
  f.count("nuclei_true", "nuclei that show, summed over frames", s.nuclei_found + s.nuclei_missed);
  f.percent("detection_precision", "of what was found, real",
            ratio(s.nuclei_found, s.nuclei_found + s.nuclei_invented));
  f.percent("detection_recall", "of what shows, found",
            ratio(s.nuclei_found, s.nuclei_found + s.nuclei_missed));
  f.percent("detection_f1", "detection F1", f1(s));
  f.percent("links_kept", "frame-to-frame links kept", s.links.value());
  f.percent("identities_kept", "identities kept through mitosis", s.identities.value());
}

void entry_figures(const FilmScore& s, Figures& f) {
  f.count("entries_true", "mitotic entries to be found", s.entries.of);
  f.percent("entries_found", "entries found", s.entries.value());
  f.count("entries_invented", "entries invented", s.entries_invented);
  f.percent("entries_invented_share", "entries invented, of all to be found",
            ratio(s.entries_invented, s.entries.of));
  f.number("entry_error_median", "entry time error, median, frame intervals",
           middle(sizes(s.entry_errors)));
  f.number("entry_error_95", "entry time error, 95 % lie below, frame intervals",
           high(sizes(s.entry_errors)));
  f.number("entry_bias", "entry time bias, frame intervals", middle(s.entry_errors));
  f.percent("entry_coverage", "95 % intervals of entry time that hold the truth",
            s.entry_intervals.value());
}

void import_figures(const FilmScore& s, Figures& f) {
  f.count("interphases_seen", "interphases seen from formation to entry", s.rates.of);
  f.percent("rate_given", "of these, with an import rate", s.rates.value());
  f.percent("rate_bias", "import rate bias", middle(s.rate_errors));
  f.percent("rate_error_median", "import rate error, median", middle(sizes(s.rate_errors)));
  f.percent("rate_coverage", "95 % intervals of import rate that hold the truth",
            s.rate_intervals.value());
  f.percent("initial_bias", "initial import bias", middle(s.initial_errors));
  f.percent("initial_error_median", "initial import error, median",
            middle(sizes(s.initial_errors)));
  f.percent("initial_coverage", "95 % intervals of initial import that hold the truth",
            s.initial_intervals.value());
}

void wave_figures(const FilmScore& s, Figures& f) {
  f.count("waves_true", "waves to be found", s.waves.of);
  f.percent("waves_found", "waves found", s.waves.value());
  f.count("waves_invented", "waves invented", s.waves_invented);
  f.percent("fates_right", "found waves whose fate is right", s.fates.value());
  f.count("travelling_waves", "found waves that travel", s.speeds.of);
  f.percent("speed_given", "of these, with a speed", s.speeds.value());
  f.percent("speed_bias", "speed bias", middle(s.speed_errors));
  f.percent("speed_error_median", "speed error, median", middle(sizes(s.speed_errors)));
  f.percent("speed_coverage", "95 % intervals of speed that hold the truth",
            s.speed_intervals.value());
}

void origin_figures(const FilmScore& s, Figures& f) {
  f.count("origins_right", "origins right", s.origins_right);
  f.count("origins_missed", "origins missed", s.origins_missed);
  f.count("origins_invented", "origins invented", s.origins_invented);
  f.count("origin_waves", "waves with a visible origin", s.origin_waves.of);
  f.percent("origin_waves_right", "of these, all origins right and no other claimed",
            s.origin_waves.value());
  f.percent("sites_right", "right origins whose site is right", s.sites.value());
  Share answers;
  for (const auto& [pair, count] : s.answers) {
    answers.of += count;
    if (pair.first == pair.second) answers.hit += count;
  }
  f.percent("answers_right", "answers right", answers.value());
}

}  // namespace

std::vector<Figure> figures(const FilmScore& score) {
  Figures made;
  nuclei_figures(score, made);
  entry_figures(score, made);
  import_figures(score, made);
  wave_figures(score, made);
  origin_figures(score, made);
  return std::move(made.all);
}

}  // namespace wavefount
