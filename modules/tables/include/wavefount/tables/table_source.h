#pragma once

#include <functional>
#include <string>
#include <vector>

#include "wavefount/core/messages.h"
#include "wavefount/core/record_store.h"
#include "wavefount/core/table.h"

namespace wavefount {

/// One acquisition as the tables see it: whatever records its steps have made. Both references must
/// outlive every TableSource made from it.
struct AcquisitionView {
  const RecordStore& records;
  std::string name;  ///< acquisition name, first column of every table
  const Messages& messages;
};

using RowSink = std::function<void(const std::vector<Cell>&)>;

/// A table whose rows are made one at a time, since `traces` of a long film would not fit in memory
/// beside the film.
struct TableSource {
  std::string name;
  std::vector<Column> columns;
  std::function<void(const RowSink&)> each_row;
};

/// The tables of the contract, each from the records that exist; a record that no step has made
/// counts as empty, and the table then has no rows.
TableSource traces_table(const AcquisitionView& view);
TableSource nuclei_table(const AcquisitionView& view);
TableSource cycles_table(const AcquisitionView& view);
TableSource waves_table(const AcquisitionView& view);
TableSource fronts_table(const AcquisitionView& view);
TableSource origins_table(const AcquisitionView& view);
TableSource review_table(const AcquisitionView& view);
TableSource acquisitions_table(const AcquisitionView& view);

/// All of the above, in the order of the contract.
std::vector<TableSource> all_tables(const AcquisitionView& view);

/// Name and columns of every table, in the order of the contract, without rows; `acquisitions`
/// without the columns of a sheet.
const std::vector<Table>& declared_tables();
/// One of them. Throws Problem for a name that is no table.
const Table& declared_table(const std::string& name);

/// The `sheet_` column that carries a column of the acquisition sheet along.
Column sheet_column(const std::string& name);

/// The whole table in memory.
Table collected(const TableSource& source);

}  // namespace wavefount
