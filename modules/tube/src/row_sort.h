#pragma once

#include <cstddef>
#include <vector>

namespace wavefount::tube {

/// Sorts many short columns of numbers at once: value k of column x is rows[k][x]. A Batcher
/// odd-even merge network (Batcher 1968, AFIPS 32:307) has the same comparisons for every column,
/// so that neighbouring columns are sorted side by side in one vector register. Rows must be
/// equally long; what is not there counts as +infinity and ends up last.
void sort_columns(std::vector<std::vector<float>>& rows);

}  // namespace wavefount::tube
