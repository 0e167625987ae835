#pragma once

#include <string>
#include <vector>

#include "wavefount/tables/folder_summary.h"
#include "workbook_file.h"

namespace wavefount {

/// Fills the first sheet: what was found, to be understood in one look. `cut_notes`: sentences
/// about tables that did not fit.
void fill_summary_sheet(WorkbookFile& workbook, lxw_worksheet* sheet, const FolderSummary& summary,
                        const std::vector<std::string>& cut_notes);

}  // namespace wavefount
