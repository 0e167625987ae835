#include "sheet.h"

#include <algorithm>
#include <array>
#include <map>
#include <set>

#include "frame_folder.h"
#include "utf8.h"
#include "wavefount/acquisition/csv_reader.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

constexpr const char* sheet_name = "acquisitions.csv";
constexpr const char* key_column = "acquisition";
constexpr std::array<const char*, 5> number_columns = {
    "tube_width_um", "temperature_c", "minutes_from_start", "nuclei_per_ul", "exposure_ms"};

struct SheetRow {
  int line = 0;
  std::map<std::string, std::string> cells;
};

CsvTable clean_table(const std::filesystem::path& file) {
  auto table = read_csv(file, ",;\t");
  std::set<std::string> seen;
  for (auto& name : table.header) {
    name = trimmed(as_utf8(name));
    if (!name.empty() && !seen.insert(name).second) {
      throw Problem("The sheet acquisitions.csv has two columns " + in_quotes(name) +
                    "; rename or remove one.");
    }
  }
  for (auto& row : table.rows) {
    for (auto& cell : row) cell = trimmed(as_utf8(cell));
  }
  if (table.column(key_column) < 0) {
    throw Problem(
        "The sheet acquisitions.csv has no column \"acquisition\"; add it with the name "
        "of each film.");
  }
  return table;
}

/// Numbers written with a decimal comma are turned; other text stays, and is said.
void check_numbers(SheetRow& row, std::vector<std::string>& messages) {
  for (const char* column : number_columns) {
    const auto cell = row.cells.find(column);
    if (cell == row.cells.end() || cell->second.empty() || parse_number(cell->second)) continue;
    std::string with_point = cell->second;
    std::replace(with_point.begin(), with_point.end(), ',', '.');
    if (parse_number(with_point)) {
      cell->second = with_point;
    } else {
      messages.push_back("The sheet acquisitions.csv, line " + std::to_string(row.line) +
                         ", gives " + in_quotes(cell->second) + " for " + column +
                         ", which must be a number.");
    }
  }
}

/// The film's name without a tube's ending; the same name where it has none.
std::string film_of_tube(const std::string& name) {
  constexpr std::string_view ending = "/tube-";
  const auto at = name.rfind(ending);
  if (at == std::string::npos || !parse_integer(name.substr(at + ending.size()))) return name;
  return name.substr(0, at);
}

void give_row(FoundFilm& film, const SheetRow& row, std::map<std::string, int>& first_line) {
  const auto [entry, first] = first_line.try_emplace(film.name, row.line);
  if (first) {
    film.sheet = row.cells;
  } else if (film.problem.empty()) {
    film.problem = "The sheet acquisitions.csv has two rows for " + in_quotes(film.name, 200) +
                   " (lines " + std::to_string(entry->second) + " and " + std::to_string(row.line) +
                   "); keep one.";
  }
}

FoundFilm* find_film(FolderListing& listing, const std::string& name) {
  const auto found = std::find_if(listing.films.begin(), listing.films.end(),
                                  [&](const FoundFilm& film) { return film.name == name; });
  return found == listing.films.end() ? nullptr : &*found;
}

void place_row(FolderListing& listing, const std::string& key, const SheetRow& row,
               std::map<std::string, int>& first_line) {
  FoundFilm* film = find_film(listing, key);
  if (film == nullptr) film = find_film(listing, acquisition_name(key));
  if (film != nullptr) {
    give_row(*film, row, first_line);
  } else if (const auto of_tube = film_of_tube(key);
             of_tube != key && find_film(listing, of_tube) != nullptr) {
    if (!listing.tube_rows.emplace(key, row.cells).second) {
      listing.messages.push_back("The sheet acquisitions.csv has two rows for " +
                                 in_quotes(key, 200) + "; the first was used.");
    }
  } else {
    listing.messages.push_back("The sheet acquisitions.csv, line " + std::to_string(row.line) +
                               ", names " + in_quotes(key, 200) +
                               ", but the folder has no such film.");
  }
}

}  // namespace

void join_sheet(const std::filesystem::path& folder, FolderListing& listing) {
  const auto file = folder / sheet_name;
  std::error_code ignored;
  if (!std::filesystem::exists(file, ignored)) return;
  const auto table = clean_table(file);
  for (const auto& name : table.header) {
    if (!name.empty() && name != key_column) listing.sheet_columns.push_back(name);
  }
  const auto key = static_cast<std::size_t>(table.column(key_column));
  std::map<std::string, int> first_line;
  for (std::size_t i = 0; i < table.rows.size(); ++i) {
    SheetRow row{table.lines[i], {}};
    for (std::size_t c = 0; c < table.header.size(); ++c) {
      if (c != key && !table.header[c].empty()) row.cells[table.header[c]] = table.rows[i][c];
    }
    if (table.rows[i][key].empty()) {
      listing.messages.push_back("The sheet acquisitions.csv, line " + std::to_string(row.line) +
                                 ", names no acquisition and was left out.");
      continue;
    }
    check_numbers(row, listing.messages);
    place_row(listing, table.rows[i][key], row, first_line);
  }
  for (auto& film : listing.films) {
    film.sheet_columns = listing.sheet_columns;
    if (first_line.count(film.name) == 0) {
      listing.messages.push_back("The sheet acquisitions.csv has no row for " +
                                 in_quotes(film.name, 200) + ".");
    }
  }
}

}  // namespace wavefount
