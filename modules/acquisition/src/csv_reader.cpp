#include "wavefount/acquisition/csv_reader.h"

#include <algorithm>
#include <array>

#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

/// A row of a table is far shorter; a quote that is never closed must not swallow a whole disk.
constexpr std::size_t longest_record = std::size_t{1} << 24U;
constexpr int end_of_file = std::char_traits<char>::eof();

}  // namespace

CsvReader::CsvReader(const std::filesystem::path& file, std::string_view separators)
    : file_(file), stream_(file, std::ios::binary) {
  if (!stream_) {
    throw Problem("The file " + file.string() +
                  " cannot be opened; check that it is there and may be read.");
  }
  std::array<char, 3> start{};
  stream_.read(start.data(), start.size());
  const std::string_view mark(start.data(), static_cast<std::size_t>(stream_.gcount()));
  stream_.clear();
  if (mark.starts_with("\xFF\xFE") || mark.starts_with("\xFE\xFF")) {
    throw Problem("The file " + file.string() + " is UTF-16 text; save it as CSV in UTF-8.");
  }
  stream_.seekg(mark == "\xEF\xBB\xBF" ? 3 : 0);
  separator_ = guess_separator(separators);
}

char CsvReader::guess_separator(std::string_view separators) {
  if (separators.size() < 2) return separators.empty() ? ',' : separators.front();
  const auto start = stream_.tellg();
  std::array<std::size_t, 256> count{};
  bool quoted = false, seen = false;
  for (int letter = stream_.get(); letter != end_of_file; letter = stream_.get()) {
    if (letter == '"') quoted = !quoted;
    const bool line_end = letter == '\n' || letter == '\r';
    if (line_end && seen && !quoted) break;
    seen = seen || !line_end;
    if (!quoted) ++count[static_cast<std::size_t>(letter) & 255U];
  }
  stream_.clear();
  stream_.seekg(start);
  return *std::max_element(separators.begin(), separators.end(), [&](char left, char right) {
    return count[static_cast<unsigned char>(left)] < count[static_cast<unsigned char>(right)];
  });
}

void CsvReader::refuse(const std::string& what) const {
  throw Problem("The file " + file_.string() + ", line " + std::to_string(record_line_) + ", " +
                what + ".");
}

void CsvReader::add(std::string& cell, char letter) {
  if (++record_bytes_ > longest_record) refuse("holds a record that is too long for a table");
  cell += letter;
}

void CsvReader::end_line(char first) {
  if (first == '\r' && stream_.peek() == '\n') stream_.get();
  ++line_;
}

void CsvReader::read_quoted(std::string& cell) {
  for (int letter = stream_.get(); letter != end_of_file; letter = stream_.get()) {
    if (letter == '"') {
      if (stream_.peek() != '"') return;
      stream_.get();
    }
    if (letter == '\n') ++line_;
    add(cell, static_cast<char>(letter));
  }
  refuse("opens a quote that is never closed; add the closing quote");
}

void CsvReader::read_record(std::vector<std::string>& cells) {
  cells.assign(1, "");
  record_line_ = line_;
  record_bytes_ = 0;
  bool cell_start = true;
  for (int next_letter = stream_.get(); next_letter != end_of_file; next_letter = stream_.get()) {
    const char letter = static_cast<char>(next_letter);
    if (letter == '\n' || letter == '\r') {
      end_line(letter);
      return;
    }
    if (letter == separator_) {
      if (++record_bytes_ > longest_record) refuse("holds a record that is too long for a table");
      cells.emplace_back();
      cell_start = true;
    } else if (letter == '"' && cell_start) {
      read_quoted(cells.back());
      cell_start = false;
    } else {
      add(cells.back(), letter);
      cell_start = false;
    }
  }
}

bool CsvReader::next(std::vector<std::string>& cells) {
  while (stream_.peek() != end_of_file) {
    read_record(cells);
    if (cells.size() > 1 || !cells.front().empty()) return true;
  }
  if (stream_.bad()) refuse("cannot be read");
  cells.clear();
  return false;
}

int CsvTable::column(std::string_view name) const {
  const auto found = std::find(header.begin(), header.end(), name);
  return found == header.end() ? -1 : static_cast<int>(found - header.begin());
}

CsvTable read_csv(const std::filesystem::path& file, std::string_view separators) {
  CsvReader reader(file, separators);
  CsvTable table;
  if (!reader.next(table.header)) {
    throw Problem("The file " + file.string() + " is empty; it needs a header row.");
  }
  for (std::vector<std::string> cells; reader.next(cells);) {
    while (cells.size() > table.header.size() && cells.back().empty()) cells.pop_back();
    if (cells.size() > table.header.size()) {
      throw Problem("The file " + file.string() + ", line " + std::to_string(reader.line()) +
                    ", has more cells than the header has columns; quote cells that hold a \"" +
                    reader.separator() + "\".");
    }
    cells.resize(table.header.size());
    table.rows.push_back(cells);
    table.lines.push_back(reader.line());
  }
  return table;
}

}  // namespace wavefount
