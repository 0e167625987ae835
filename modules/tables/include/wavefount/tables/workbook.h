#pragma once

#include <filesystem>

#include "wavefount/core/messages.h"

namespace wavefount {

/// Rows of a sheet in the workbook format, header included (ECMA-376).
constexpr int most_sheet_rows = 1'048'576;

/// Writes `workbook.xlsx` from the joined CSV tables of an output folder: a first sheet that says
/// what was found, one sheet a table (`traces` stays CSV), a last sheet that explains every column.
/// The same tables give the same bytes. A table of more rows than a sheet takes is cut, which the
/// first sheet and a warning say. Throws Problem when a table is missing or the file cannot be
/// written.
void write_workbook(const std::filesystem::path& folder, Messages* messages,
                    int sheet_rows = most_sheet_rows);

}  // namespace wavefount
