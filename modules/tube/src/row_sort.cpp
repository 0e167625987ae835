#include "row_sort.h"

#include <algorithm>

namespace wavefount::tube {
namespace {

void compare_exchange(std::vector<float>& low, std::vector<float>& high) {
  float* a = low.data();
  float* b = high.data();
  for (std::size_t x = 0; x < low.size(); ++x) {
    const float smaller = std::min(a[x], b[x]);
    b[x] = std::max(a[x], b[x]);
    a[x] = smaller;
  }
}

}  // namespace

void sort_columns(std::vector<std::vector<float>>& rows) {
  const std::size_t count = rows.size();
  for (std::size_t run = 1; run < count; run *= 2) {
    for (std::size_t step = run; step >= 1; step /= 2) {
      for (std::size_t first = step % run; first + step < count; first += 2 * step) {
        for (std::size_t i = 0; i < std::min(step, count - first - step); ++i) {
          const std::size_t low = first + i;
          const std::size_t high = low + step;
          if (low / (2 * run) == high / (2 * run)) compare_exchange(rows[low], rows[high]);
        }
      }
    }
  }
}

}  // namespace wavefount::tube
