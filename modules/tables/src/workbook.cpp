#include "wavefount/tables/workbook.h"

#include <string>
#include <vector>

#include "columns_sheet.h"
#include "summary_sheet.h"
#include "table_sheet.h"
#include "wavefount/tables/folder_summary.h"
#include "workbook_file.h"

namespace wavefount {
namespace {

/// The sheets between the first and the last, the ones to look at first in front.
const std::vector<std::string> sheet_tables = {"acquisitions", "review", "waves", "origins",
                                               "fronts",       "nuclei", "cycles"};

std::string cut_note(const std::string& table, const SheetRows& rows) {
  return "The sheet " + table + " shows the first " + std::to_string(rows.shown) + " of " +
         std::to_string(rows.in_table) + " rows; all are in " + table + ".csv.";
}

}  // namespace

void write_workbook(const std::filesystem::path& folder, Messages* messages, int sheet_rows) {
  const auto summary = summarised(folder);
  WorkbookFile workbook(folder / "workbook.xlsx");
  auto* first = workbook.add_sheet("What was found");
  std::vector<std::string> cut_notes;
  for (const auto& table : sheet_tables) {
    const auto rows =
        fill_table_sheet(workbook, workbook.add_sheet(table), folder, table, sheet_rows);
    if (rows.shown < rows.in_table) cut_notes.push_back(cut_note(table, rows));
  }
  fill_summary_sheet(workbook, first, summary, cut_notes);
  fill_columns_sheet(workbook, workbook.add_sheet("What the columns mean"), folder);
  workbook.commit();
  if (messages)
    for (const auto& note : cut_notes) messages->warn(note);
}

}  // namespace wavefount
