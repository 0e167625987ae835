#include "table_sheet.h"

#include <algorithm>
#include <vector>

#include "wavefount/acquisition/csv_reader.h"
#include "wavefount/core/text.h"
#include "wavefount/tables/table_source.h"

namespace wavefount {
namespace {

constexpr double number_width = 13;
constexpr double name_width = 26;
constexpr double word_width = 15;
constexpr double sentence_width = 60;
constexpr double heading_height = 54;  // points: four lines of a heading with its unit

constexpr std::string_view sheet_prefix = "sheet_";

bool holds_sentences(const Column& column) {
  static const std::vector<std::string> names = {"message", "detail", "comment", "notes",
                                                 "reasons"};
  return std::find(names.begin(), names.end(), column.name) != names.end();
}

double width_of(const Column& column) {
  if (column.name == "acquisition") return name_width;
  if (holds_sentences(column)) return column.name == "reasons" ? name_width : sentence_width;
  return column.kind == ColumnKind::text ? word_width : number_width;
}

/// A number as people write one; "007" is a name.
bool reads_as_number(const std::string& text) {
  const bool padded = text.size() > 1 && text[0] == '0' && text[1] >= '0' && text[1] <= '9';
  return !padded && parse_number(text).has_value();
}

/// The sheet's columns have no declared kind: a column is numeric when every cell in it is.
void find_sheet_kinds(Table& table, const CsvTable& rows) {
  for (std::size_t i = 0; i < table.columns.size(); ++i) {
    if (!table.columns[i].name.starts_with(sheet_prefix)) continue;
    const bool numeric = std::all_of(rows.rows.begin(), rows.rows.end(), [&](const auto& row) {
      return row[i].empty() || reads_as_number(row[i]);
    });
    if (numeric) table.columns[i].kind = ColumnKind::number;
  }
}

class SheetFiller {
 public:
  SheetFiller(WorkbookFile& workbook, lxw_worksheet* sheet, const Table& table)
      : workbook_(workbook), sheet_(sheet), columns_(table.columns) {
    for (const auto& column : columns_) {
      const bool shown_as_written = column.name.starts_with(sheet_prefix);
      const bool text = column.kind == ColumnKind::text || shown_as_written;
      formats_.push_back(text ? workbook_.format(CellStyle::text)
                              : workbook_.decimals(column.decimals));
    }
  }

  void headings() {
    worksheet_set_row(sheet_, 0, heading_height, nullptr);
    for (lxw_col_t i = 0; i < columns_.size(); ++i) {
      worksheet_set_column(sheet_, i, i, width_of(columns_[i]), nullptr);
      write_text(sheet_, 0, i, columns_[i].heading, workbook_.format(CellStyle::heading));
    }
    worksheet_freeze_panes(sheet_, 1, 1);
    worksheet_set_landscape(sheet_);
    worksheet_fit_to_pages(sheet_, 1, 0);
    worksheet_repeat_rows(sheet_, 0, 0);
  }

  void row(lxw_row_t at, const std::vector<std::string>& cells) {
    const auto count = std::min(cells.size(), columns_.size());
    for (lxw_col_t i = 0; i < count; ++i) {
      if (cells[i].empty()) continue;
      const auto number =
          columns_[i].kind == ColumnKind::text ? std::optional<double>() : parse_number(cells[i]);
      if (number)
        worksheet_write_number(sheet_, at, i, *number, formats_[i]);
      else
        write_text(sheet_, at, i, cells[i],
                   workbook_.format(i == 0 ? CellStyle::text : CellStyle::word));
    }
  }

  void filters(lxw_row_t last_row) {
    worksheet_autofilter(sheet_, 0, 0, last_row, static_cast<lxw_col_t>(columns_.size() - 1));
  }

 private:
  WorkbookFile& workbook_;
  lxw_worksheet* sheet_;
  const std::vector<Column>& columns_;
  std::vector<lxw_format*> formats_;
};

}  // namespace

Table joined_table_columns(const std::filesystem::path& folder, const std::string& name) {
  Table table = declared_table(name);
  if (name != "acquisitions") return table;
  const auto rows = read_csv(folder / (name + ".csv"));
  for (const auto& column : rows.header)
    if (column.starts_with(sheet_prefix))
      table.columns.push_back(sheet_column(column.substr(sheet_prefix.size())));
  find_sheet_kinds(table, rows);
  return table;
}

SheetRows fill_table_sheet(WorkbookFile& workbook, lxw_worksheet* sheet,
                           const std::filesystem::path& folder, const std::string& name,
                           int sheet_rows) {
  const auto table = joined_table_columns(folder, name);
  CsvReader reader(folder / (name + ".csv"));
  std::vector<std::string> cells;
  reader.next(cells);
  SheetFiller filler(workbook, sheet, table);
  filler.headings();
  SheetRows rows;
  while (reader.next(cells)) {
    ++rows.in_table;
    if (rows.in_table < sheet_rows) filler.row(static_cast<lxw_row_t>(++rows.shown), cells);
  }
  filler.filters(static_cast<lxw_row_t>(std::max(rows.shown, 1LL)));
  return rows;
}

}  // namespace wavefount
