#pragma once

#include <cstdint>
#include <string>
#include <variant>
#include <vector>

namespace wavefount {

enum class ColumnKind { text, integer, number };

/// One column as declared once for CSV, workbook and explanations.
struct Column {
  std::string name;     ///< in the CSV
  std::string heading;  ///< in the workbook, units spelt out
  ColumnKind kind = ColumnKind::text;
  int decimals = 2;         ///< shown in the workbook, for numbers
  std::string explanation;  ///< a sentence
};

/// Empty (monostate) where a value does not exist.
using Cell = std::variant<std::monostate, std::string, std::int64_t, double>;

struct Table {
  std::string name;
  std::vector<Column> columns;
  std::vector<std::vector<Cell>> rows;
};

}  // namespace wavefount
