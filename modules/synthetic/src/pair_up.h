#pragma once

#include <algorithm>
#include <optional>
#include <tuple>
#include <vector>

namespace wavefount {

/// Pairs two lists one to one, cheapest first. `cost(i, j)` is empty where the two cannot belong
/// together. Returns for each of the first list the index in the second.
template <typename Cost>
std::vector<std::optional<std::size_t>> pair_up(std::size_t first, std::size_t second, Cost cost) {
  std::vector<std::tuple<double, std::size_t, std::size_t>> pairs;
  for (std::size_t i = 0; i < first; ++i)
    for (std::size_t j = 0; j < second; ++j)
      if (const std::optional<double> price = cost(i, j)) pairs.emplace_back(*price, i, j);
  std::sort(pairs.begin(), pairs.end());
  std::vector<std::optional<std::size_t>> partners(first);
  std::vector<bool> taken(second, false);
  for (const auto& [price, i, j] : pairs) {
    if (partners[i] || taken[j]) continue;
    partners[i] = j;
    taken[j] = true;
  }
  return partners;
}

}  // namespace wavefount
