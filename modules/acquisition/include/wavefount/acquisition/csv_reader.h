#pragma once

#include <filesystem>
#include <fstream>
#include <string>
#include <string_view>
#include <vector>

namespace wavefount {

/// Reads a CSV file record by record (RFC 4180; a byte order mark, any line ends, and blank lines
/// are tolerated). Memory does not grow with the file.
class CsvReader {
 public:
  /// `separators`: which are tolerated; the one most frequent in the first record is taken, the
  /// first of them where none occurs. Throws Problem when the file cannot be opened or is UTF-16.
  explicit CsvReader(const std::filesystem::path& file, std::string_view separators = ",");

  /// The next record, false at the end. Throws Problem (with the line) for a quote never closed and
  /// for a record of absurd length.
  bool next(std::vector<std::string>& cells);
  /// Line on which the last record began, from 1.
  int line() const { return record_line_; }
  char separator() const { return separator_; }

 private:
  void read_record(std::vector<std::string>& cells);
  void read_quoted(std::string& cell);
  void end_line(char first);
  void add(std::string& cell, char letter);
  char guess_separator(std::string_view separators);
  [[noreturn]] void refuse(const std::string& what) const;

  std::filesystem::path file_;
  std::ifstream stream_;
  char separator_ = ',';
  int line_ = 1;
  int record_line_ = 1;
  std::size_t record_bytes_ = 0;
};

/// A small CSV file read whole: its header row and the records below it.
struct CsvTable {
  std::vector<std::string> header;
  std::vector<std::vector<std::string>> rows;  ///< as many cells as the header; short rows filled
  std::vector<int> lines;                      ///< of the rows, from 1

  /// Index of the column with this name, -1 where there is none.
  int column(std::string_view name) const;
};

/// Throws Problem when the file is empty, cannot be read, or a row has more cells than the header.
CsvTable read_csv(const std::filesystem::path& file, std::string_view separators = ",");

}  // namespace wavefount
