#pragma once

#include <vector>

namespace wavefount {

/// A pair that may be made; a pair without a candidate is forbidden.
struct AssignmentCandidate {
  int row = 0;
  int column = 0;
  double cost = 0;  ///< finite, of any sign
};

/// Linear sum assignment in which rows and columns may stay alone: minimises the sum of the costs
/// of the pairs made plus `row_alone[i]` for every row and `column_alone[j]` for every column left
/// without a partner. Returns for each row its column or -1.
///
/// Exact, by shortest augmenting paths with dual prices (Jonker & Volgenant 1987, Computing
/// 38:325; rectangular form after Crouse 2016, IEEE Trans. Aerosp. Electron. Syst. 52:1679), one
/// connected component of the candidates at a time, so that many small problems cost little.
/// Equal costs are settled by the order of rows and columns. Of a pair named twice the cheaper
/// counts. Throws Problem for an index out of range or a cost that is not finite.
std::vector<int> assign_or_leave(const std::vector<AssignmentCandidate>& candidates,
                                 const std::vector<double>& row_alone,
                                 const std::vector<double>& column_alone);

/// Linear sum assignment of every row (or, where there are fewer columns, of every column) at the
/// least total cost. Returns for each row its column or -1. Throws Problem when the forbidden pairs
/// leave no such assignment, and as above.
std::vector<int> assign_all(const std::vector<AssignmentCandidate>& candidates, int rows,
                            int columns);

}  // namespace wavefount
