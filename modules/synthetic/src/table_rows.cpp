#include "table_rows.h"

#include <algorithm>

#include "wavefount/acquisition/csv_reader.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {

TableRow::TableRow(const std::filesystem::path& file, const std::vector<std::string>& header)
    : file_(file), header_(header) {}

void TableRow::take(std::vector<std::string> cells, int line) {
  cells_ = std::move(cells);
  line_ = line;
}

std::string TableRow::text(std::string_view column) const {
  const auto found = std::find(header_.begin(), header_.end(), column);
  if (found == header_.end())
    throw Problem("the table " + file_.string() + " has no column " + std::string(column) +
                  "; was it written by another program?");
  const auto index = static_cast<std::size_t>(found - header_.begin());
  return index < cells_.size() ? cells_[index] : std::string();
}

std::optional<double> TableRow::number(std::string_view column) const {
  const auto cell = text(column);
  if (cell.empty()) return std::nullopt;
  const auto value = parse_number(cell);
  if (!value)
    throw Problem("line " + std::to_string(line_) + " of " + file_.string() + ": " + cell +
                  " is no number in column " + std::string(column) + ".");
  return value;
}

std::optional<int> TableRow::integer(std::string_view column) const {
  const auto value = number(column);
  if (!value) return std::nullopt;
  constexpr double largest = 2e9;
  if (!(*value >= -largest && *value <= largest) || *value != static_cast<int>(*value))
    throw Problem("line " + std::to_string(line_) + " of " + file_.string() +
                  ": a whole number must stand in column " + std::string(column) + ".");
  return static_cast<int>(*value);
}

double TableRow::required(std::string_view column) const {
  const auto value = number(column);
  if (!value)
    throw Problem("line " + std::to_string(line_) + " of " + file_.string() +
                  ": the cell in column " + std::string(column) + " is empty.");
  return *value;
}

int TableRow::required_integer(std::string_view column) const {
  required(column);
  return *integer(column);
}

void each_row(const std::filesystem::path& file, const std::function<void(const TableRow&)>& take) {
  CsvReader reader(file);
  std::vector<std::string> header;
  if (!reader.next(header)) throw Problem("the table " + file.string() + " is empty.");
  TableRow row(file, header);
  std::vector<std::string> cells;
  while (reader.next(cells)) {
    row.take(cells, reader.line());
    take(row);
  }
}

}  // namespace wavefount
