#pragma once

#include "wavefount/core/step.h"

namespace wavefount {

/// Joins the acquisitions' CSV tables into one a table at the root of the output folder: header
/// once, rows in the order of `work.acquisitions`. `acquisitions` also has a row for each that
/// failed, and the `sheet_` columns of all. Memory does not grow with the tables. A table that is
/// missing, cut short or has other columns is left out with a warning. Throws Problem when the root
/// cannot be written.
void gather_tables(FolderWork& work);

}  // namespace wavefount
