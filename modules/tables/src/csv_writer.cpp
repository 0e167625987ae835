#include "wavefount/tables/csv_writer.h"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>

#include "wavefount/core/text.h"

namespace wavefount {
namespace {

constexpr int significant_digits = 6;
constexpr int time_decimals = 4;
/// From here on four decimals are more than six significant digits.
constexpr double long_time_min = 100;

/// Columns of times and of lengths of time, by the naming rule for units.
bool is_time(const Column& column) {
  return column.kind == ColumnKind::number && column.name.ends_with("_min") &&
         !column.name.ends_with("per_min");
}

double rounded(double value, std::chars_format format, int precision) {
  std::array<char, 400> text{};  // fixed notation of the largest double has 309 digits
  const auto end =
      std::to_chars(text.data(), text.data() + text.size(), value, format, precision).ptr;
  double result = value;
  std::from_chars(text.data(), end, result);
  return result;
}

}  // namespace

std::string csv_number(double value, bool is_time) {
  if (!std::isfinite(value)) return {};
  if (is_time && std::abs(value) >= long_time_min)
    return number_text(rounded(value, std::chars_format::fixed, time_decimals));
  return number_text(rounded(value, std::chars_format::scientific, significant_digits - 1));
}

std::string csv_text(std::string_view text) {
  std::string safe = valid_utf8(text);
  std::replace(safe.begin(), safe.end(), '\0', ' ');
  // Spreadsheets skip blanks before they look for a formula; tab and line breaks start one too.
  const auto first = safe.find_first_not_of(" \t\r\n");
  const bool formula = first != std::string::npos &&
                       std::string_view("=+-@").find(safe[first]) != std::string_view::npos &&
                       !parse_number(safe);
  const bool control =
      !safe.empty() && std::string_view("\t\r\n").find(safe.front()) != std::string_view::npos;
  if (formula || control) safe.insert(safe.begin(), '\'');
  return safe;
}

std::string csv_quoted(std::string_view text) {
  if (text.find_first_of(",\"\r\n") == std::string_view::npos) return std::string(text);
  std::string quoted = "\"";
  for (const char c : text) {
    if (c == '"') quoted += '"';
    quoted += c;
  }
  return quoted + '"';
}

CsvWriter::CsvWriter(const std::filesystem::path& file) : file_(file) {}

void CsvWriter::header(const std::vector<Column>& columns) {
  is_time_.clear();
  for (const auto& column : columns) {
    is_time_.push_back(is_time(column));
    line_ += csv_quoted(csv_text(column.name));
    line_ += ',';
  }
  end_line();
}

void CsvWriter::row(const std::vector<Cell>& cells) {
  for (std::size_t i = 0; i < cells.size(); ++i) {
    if (const auto* number = std::get_if<double>(&cells[i]))
      line_ += csv_number(*number, i < is_time_.size() && is_time_[i]);
    else if (const auto* integer = std::get_if<std::int64_t>(&cells[i]))
      line_ += std::to_string(*integer);
    else if (const auto* text = std::get_if<std::string>(&cells[i]))
      line_ += csv_quoted(csv_text(*text));
    line_ += ',';
  }
  end_line();
}

void CsvWriter::copied_row(const std::vector<std::string>& cells) {
  for (const auto& cell : cells) {
    line_ += csv_quoted(cell);
    line_ += ',';
  }
  end_line();
}

/// The comma after the last cell gives way to the line end.
void CsvWriter::end_line() {
  if (!line_.empty()) line_.pop_back();
  line_ += "\r\n";
  file_.write(line_);
  line_.clear();
}

void write_csv(const TableSource& source, const std::filesystem::path& file) {
  CsvWriter writer(file);
  writer.header(source.columns);
  source.each_row([&](const std::vector<Cell>& row) { writer.row(row); });
  writer.commit();
}

}  // namespace wavefount
