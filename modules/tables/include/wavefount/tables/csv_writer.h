#pragma once

#include <filesystem>
#include <string>
#include <string_view>
#include <vector>

#include "wavefount/core/table.h"
#include "wavefount/tables/file_aside.h"
#include "wavefount/tables/table_source.h"

namespace wavefount {

/// Writes a CSV file as RFC 4180 has it: UTF-8, lines that end in CR LF, quotes where needed, `.`
/// as decimal mark, an empty cell where a value does not exist.
class CsvWriter {
 public:
  explicit CsvWriter(const std::filesystem::path& file);

  /// The header row. Call it first.
  void header(const std::vector<Column>& columns);
  /// One row of as many cells as columns; numbers rounded as `csv_number` says, text made safe as
  /// `csv_text` says.
  void row(const std::vector<Cell>& cells);
  /// One row of cells that come from another of our CSV files: quoted anew, otherwise unchanged.
  void copied_row(const std::vector<std::string>& cells);
  /// Puts the file in its place.
  void commit() { file_.commit(); }

 private:
  void end_line();

  FileAside file_;
  std::vector<bool> is_time_;
  std::string line_;
};

/// Six significant digits, but a time (minutes) never with fewer than four decimals: entries are
/// finer than the frame interval even at the end of a long film. Shortest text of the rounded
/// value; empty for a value that is not finite.
std::string csv_number(double value, bool is_time);
/// Valid UTF-8, no zero bytes, and an apostrophe in front of what a spreadsheet would take for a
/// formula.
std::string csv_text(std::string_view text);
/// A cell as it stands in the file: in quotes where it holds a comma, quote or line break.
std::string csv_quoted(std::string_view text);

/// Writes a whole table. Throws Problem when the file cannot be written.
void write_csv(const TableSource& source, const std::filesystem::path& file);

}  // namespace wavefount
