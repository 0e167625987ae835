#include <algorithm>
#include <array>
#include <cmath>
#include <iomanip>
#include <nlohmann/json.hpp>
#include <ostream>
#include <sstream>

#include "wavefount/synthetic/score.h"
#include "wavefount/tables/csv_writer.h"

namespace wavefount {
namespace {

std::string shown(const Figure& figure) {
  if (!figure.value) return "-";
  std::ostringstream out;
  const double value = *figure.value;
  if (figure.percent)
    out << std::fixed << std::setprecision(1) << 100 * value << " %";
  else if (value == std::floor(value))
    out << std::fixed << std::setprecision(0) << value;
  else
    out << std::fixed << std::setprecision(3) << value;
  return out.str();
}

void print_all(const FilmScore& score, std::ostream& out) {
  for (const auto& figure : figures(score))
    out << "  " << std::setw(11) << std::right << shown(figure) << "  " << figure.sentence << "\n";
}

/// The figures that tell a good film from a bad one, a line a film.
void print_films(const ScoreReport& report, std::ostream& out) {
  constexpr std::array<std::pair<const char*, const char*>, 9> columns = {{
      {"detection_f1", "F1"},
      {"entries_found", "entries"},
      {"entries_invented", "invented"},
      {"entry_error_median", "time err"},
      {"rate_bias", "rate bias"},
      {"waves_found", "waves"},
      {"speed_bias", "speed bias"},
      {"origin_waves_right", "origins"},
      {"answers_right", "answers"},
  }};
  std::size_t widest = 12;
  for (const auto& film : report.films) widest = std::max(widest, film.name.size());
  const auto name_width = static_cast<int>(widest);
  out << std::left << std::setw(name_width) << "film" << std::right;
  for (const auto& column : columns) out << std::setw(12) << column.second;
  out << "\n";
  for (const auto& film : report.films) {
    out << std::left << std::setw(name_width) << film.name << std::right;
    const auto all = figures(film);
    for (const auto& column : columns) {
      const auto figure = std::find_if(all.begin(), all.end(),
                                       [&](const Figure& f) { return f.name == column.first; });
      out << std::setw(12) << shown(*figure);
    }
    out << (film.has_results ? "" : "  no results") << "\n";
  }
}

void print_answers(const FilmScore& score, std::ostream& out) {
  for (const auto& [pair, count] : score.answers)
    out << "  " << std::setw(11) << count << "  " << pair.first
        << (pair.first == pair.second ? " answered so" : " answered as " + pair.second) << "\n";
}

nlohmann::ordered_json film_json(const FilmScore& score) {
  nlohmann::ordered_json made;
  made["acquisition"] = score.name;
  made["has_results"] = score.has_results;
  for (const auto& figure : figures(score)) {
    if (figure.value)
      made[figure.name] = *figure.value;
    else
      made[figure.name] = nullptr;
  }
  auto& answers = made["answers"] = nlohmann::ordered_json::array();
  for (const auto& [pair, count] : score.answers)
    answers.push_back({{"expected", pair.first}, {"given", pair.second}, {"waves", count}});
  return made;
}

}  // namespace

void print(const ScoreReport& report, std::ostream& out) {
  print_films(report, out);
  out << "\nAll films:\n";
  print_all(report.all, out);
  out << "\nAnswers, true and given:\n";
  print_answers(report.all, out);
  for (const auto& note : report.notes) out << "Note: " << note << "\n";
}

void write_score_csv(const ScoreReport& report, const std::filesystem::path& file) {
  std::vector<Column> columns{{"acquisition", "acquisition", ColumnKind::text, 0, ""}};
  for (const auto& figure : figures(report.all))
    columns.push_back({figure.name, figure.name, ColumnKind::number, 4, figure.sentence});
  CsvWriter writer(file);
  writer.header(columns);
  const auto row_of = [](const FilmScore& score) {
    std::vector<Cell> row;
    row.emplace_back(score.name);
    for (const auto& figure : figures(score)) {
      auto& cell = row.emplace_back();
      if (figure.value) cell = *figure.value;
    }
    return row;
  };
  for (const auto& film : report.films) writer.row(row_of(film));
  writer.row(row_of(report.all));
  writer.commit();
}

std::string score_json(const ScoreReport& report) {
  nlohmann::ordered_json made;
  made["all"] = film_json(report.all);
  auto& films = made["acquisitions"] = nlohmann::ordered_json::array();
  for (const auto& film : report.films) films.push_back(film_json(film));
  made["notes"] = report.notes;
  return made.dump(2) + "\n";
}

}  // namespace wavefount
