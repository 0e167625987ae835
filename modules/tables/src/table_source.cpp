#include "wavefount/tables/table_source.h"

#include <algorithm>

#include "wavefount/core/problem.h"

namespace wavefount {

std::vector<TableSource> all_tables(const AcquisitionView& view) {
  return {traces_table(view), nuclei_table(view),  cycles_table(view), waves_table(view),
          fronts_table(view), origins_table(view), review_table(view), acquisitions_table(view)};
}

const std::vector<Table>& declared_tables() {
  static const std::vector<Table> tables = [] {
    const RecordStore nothing;
    const Messages none;
    std::vector<Table> declared;
    for (const auto& source : all_tables({nothing, {}, none}))
      declared.push_back({source.name, source.columns, {}});
    return declared;
  }();
  return tables;
}

const Table& declared_table(const std::string& name) {
  const auto& tables = declared_tables();
  const auto at = std::find_if(tables.begin(), tables.end(),
                               [&](const Table& table) { return table.name == name; });
  if (at == tables.end()) throw Problem("There is no table '" + name + "'.");
  return *at;
}

Table collected(const TableSource& source) {
  Table table{source.name, source.columns, {}};
  source.each_row([&](const std::vector<Cell>& row) { table.rows.push_back(row); });
  return table;
}

}  // namespace wavefount
