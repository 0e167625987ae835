#pragma once

#include <filesystem>

#include "workbook_file.h"

namespace wavefount {

/// Fills the last sheet: table, column, heading and explanation of every column of every table.
void fill_columns_sheet(WorkbookFile& workbook, lxw_worksheet* sheet,
                        const std::filesystem::path& folder);

}  // namespace wavefount
