#pragma once

#include <filesystem>
#include <string>

#include "wavefount/core/table.h"
#include "workbook_file.h"

namespace wavefount {

/// Rows of data in a table and on its sheet.
struct SheetRows {
  long long in_table = 0;
  long long shown = 0;
};

/// Declared columns of the joined tables, `acquisitions` with the `sheet_` columns of its file; no
/// rows.
Table joined_table_columns(const std::filesystem::path& folder, const std::string& table);

/// Fills a sheet with a joined table: headings with units spelt out, frozen; filters; numbers as
/// numbers, text as text; at most `sheet_rows` rows, header included.
SheetRows fill_table_sheet(WorkbookFile& workbook, lxw_worksheet* sheet,
                           const std::filesystem::path& folder, const std::string& table,
                           int sheet_rows);

}  // namespace wavefount
