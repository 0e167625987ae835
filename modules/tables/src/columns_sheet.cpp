#include "columns_sheet.h"

#include "table_sheet.h"
#include "wavefount/tables/table_source.h"

namespace wavefount {
namespace {

constexpr double name_width = 26;
constexpr double heading_width = 40;
constexpr double explanation_width = 110;

}  // namespace

void fill_columns_sheet(WorkbookFile& workbook, lxw_worksheet* sheet,
                        const std::filesystem::path& folder) {
  const char* headings[] = {"Table", "Column in the CSV file", "Heading in this workbook",
                            "What it is"};
  const double widths[] = {14, name_width, heading_width, explanation_width};
  for (lxw_col_t i = 0; i < 4; ++i) {
    worksheet_set_column(sheet, i, i, widths[i], nullptr);
    write_text(sheet, 0, i, headings[i], workbook.format(CellStyle::heading));
  }
  worksheet_freeze_panes(sheet, 1, 0);
  worksheet_set_landscape(sheet);
  worksheet_fit_to_pages(sheet, 1, 0);
  lxw_row_t row = 0;
  for (const auto& declared : declared_tables()) {
    for (const auto& column : joined_table_columns(folder, declared.name).columns) {
      ++row;
      write_text(sheet, row, 0, declared.name, workbook.format(CellStyle::text));
      write_text(sheet, row, 1, column.name, workbook.format(CellStyle::text));
      write_text(sheet, row, 2, column.heading, workbook.format(CellStyle::text));
      write_text(sheet, row, 3, column.explanation, workbook.format(CellStyle::wrapped));
    }
  }
  worksheet_autofilter(sheet, 0, 0, row, 3);
}

}  // namespace wavefount
