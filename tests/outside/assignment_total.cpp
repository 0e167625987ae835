// Reads assignment problems from standard input and writes the least total cost of each, for the
// comparison with another library. A problem is "rows columns", then rows × columns costs, `x`
// where the pair is forbidden. Writes `none` where no full assignment exists.
#include <iomanip>
#include <iostream>
#include <limits>
#include <string>

#include "wavefount/core/problem.h"
#include "wavefount/tracking/assignment.h"

namespace {

using wavefount::AssignmentCandidate;

double total(const std::vector<AssignmentCandidate>& pairs, const std::vector<int>& column_of) {
  double sum = 0;
  for (const auto& pair : pairs)
    if (column_of[pair.row] == pair.column) sum += pair.cost;
  return sum;
}

}  // namespace

int main() {
  std::cout << std::setprecision(std::numeric_limits<double>::max_digits10);
  int rows = 0, columns = 0;
  while (std::cin >> rows >> columns) {
    std::vector<AssignmentCandidate> pairs;
    for (int row = 0; row < rows; ++row)
      for (int column = 0; column < columns; ++column) {
        std::string cost;
        std::cin >> cost;
        if (cost != "x") pairs.push_back({row, column, std::stod(cost)});
      }
    try {
      std::cout << total(pairs, wavefount::assign_all(pairs, rows, columns)) << '\n';
    } catch (const wavefount::Problem&) {
      std::cout << "none\n";
    }
  }
  return 0;
}
