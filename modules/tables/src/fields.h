#pragma once

#include <cmath>
#include <functional>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "wavefount/tables/table_source.h"

namespace wavefount {

/// A column and how its cell comes out of a row's data: declared in one place, so that headings and
/// values cannot get out of step.
template <class Row>
struct Field {
  Column column;
  std::function<Cell(const Row&)> value;
};

template <class Row>
std::vector<Column> columns_of(const std::vector<Field<Row>>& fields) {
  std::vector<Column> columns;
  for (const auto& field : fields) columns.push_back(field.column);
  return columns;
}

template <class Row>
std::vector<Cell> cells_of(const std::vector<Field<Row>>& fields, const Row& row) {
  std::vector<Cell> cells;
  cells.reserve(fields.size());
  for (const auto& field : fields) cells.push_back(field.value(row));
  return cells;
}

inline Column text_column(std::string name, std::string heading, std::string explanation) {
  return {std::move(name), std::move(heading), ColumnKind::text, 0, std::move(explanation)};
}

inline Column integer_column(std::string name, std::string heading, std::string explanation) {
  return {std::move(name), std::move(heading), ColumnKind::integer, 0, std::move(explanation)};
}

inline Column number_column(std::string name, std::string heading, int decimals,
                            std::string explanation) {
  return {std::move(name), std::move(heading), ColumnKind::number, decimals,
          std::move(explanation)};
}

/// Empty where the value does not exist or is not finite.
inline Cell number_cell(std::optional<double> value) {
  if (!value || !std::isfinite(*value)) return {};
  return *value;
}

inline Cell integer_cell(long long value) {
  return std::int64_t{value};
}

inline Cell text_cell(std::string text) {
  if (text.empty()) return {};
  return text;
}

inline Cell yes_no_cell(bool yes) {
  return std::string(yes ? "yes" : "no");
}

template <class Row>
Field<Row> acquisition_field() {
  return {text_column("acquisition", "Acquisition", "Name of the film, or of the tube in it."),
          [](const Row& row) { return Cell(row.acquisition); }};
}

/// A table whose rows a walker hands out one after another.
template <class Row>
TableSource source_of(std::string name, std::vector<Field<Row>> fields,
                      std::function<void(const std::function<void(const Row&)>&)> walk) {
  TableSource source;
  source.name = std::move(name);
  source.columns = columns_of(fields);
  source.each_row = [fields = std::move(fields), walk = std::move(walk)](const RowSink& sink) {
    walk([&](const Row& row) { sink(cells_of(fields, row)); });
  };
  return source;
}

}  // namespace wavefount
