#include "wavefount/tracking/assignment.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>
#include <utility>

#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

struct Edge {
  int column = 0;
  double cost = 0;
};
using Adjacency = std::vector<std::vector<Edge>>;  ///< by row

/// Every row gets a column of its own at the least total cost, or solve() says that it cannot.
class ShortestAugmentingPaths {
 public:
  ShortestAugmentingPaths(const Adjacency& edges, int columns)
      : edges_(edges),
        column_of_(edges.size(), -1),
        row_of_(static_cast<std::size_t>(columns), -1),
        row_price_(edges.size(), 0),
        column_price_(static_cast<std::size_t>(columns), 0),
        distance_(static_cast<std::size_t>(columns), infinity),
        reached_from_(static_cast<std::size_t>(columns), -1),
        scanned_(static_cast<std::size_t>(columns), false) {}

  bool solve() {
    for (int row = 0; row < static_cast<int>(edges_.size()); ++row)
      if (!augment(row)) return false;
    return true;
  }

  const std::vector<int>& column_of() const { return column_of_; }

 private:
  /// Dijkstra over reduced costs from `start` to the nearest free column, then flips the path.
  bool augment(int start) {
    touched_.clear();
    tree_rows_.assign(1, start);
    double reached = 0;
    int row = start;
    int sink = -1;
    while (sink < 0) {
      relax(row, reached);
      const int column = nearest_open();
      if (column < 0) break;
      reached = distance_[column];
      scanned_[column] = true;
      if (row_of_[column] < 0) {
        sink = column;
      } else {
        row = row_of_[column];
        tree_rows_.push_back(row);
      }
    }
    if (sink >= 0) {
      update_prices(start, reached);
      flip(start, sink);
    }
    for (const int column : touched_) {
      distance_[column] = infinity;
      scanned_[column] = false;
    }
    return sink >= 0;
  }

  void relax(int row, double reached) {
    for (const auto& edge : edges_[row]) {
      if (scanned_[edge.column]) continue;
      const double through = reached + edge.cost - row_price_[row] - column_price_[edge.column];
      if (through >= distance_[edge.column]) continue;
      if (distance_[edge.column] == infinity) touched_.push_back(edge.column);
      distance_[edge.column] = through;
      reached_from_[edge.column] = row;
    }
  }

  /// The nearest column not scanned yet; a free one wins a tie, which shortens the path.
  int nearest_open() const {
    int best = -1;
    for (const int column : touched_) {
      if (scanned_[column]) continue;
      if (best < 0 || distance_[column] < distance_[best] ||
          (distance_[column] == distance_[best] && row_of_[best] >= 0 && row_of_[column] < 0))
        best = column;
    }
    return best;
  }

  void update_prices(int start, double reached) {
    row_price_[start] += reached;
    for (const int row : tree_rows_)
      if (row != start) row_price_[row] += reached - distance_[column_of_[row]];
    for (const int column : touched_)
      if (scanned_[column]) column_price_[column] -= reached - distance_[column];
  }

  void flip(int start, int sink) {
    int column = sink;
    while (true) {
      const int row = reached_from_[column];
      row_of_[column] = row;
      std::swap(column_of_[row], column);
      if (row == start) return;
    }
  }

  const Adjacency& edges_;
  std::vector<int> column_of_, row_of_;
  std::vector<double> row_price_, column_price_;
  std::vector<double> distance_;
  std::vector<int> reached_from_;
  std::vector<bool> scanned_;
  std::vector<int> touched_;
  std::vector<int> tree_rows_;
};

void check(const std::vector<AssignmentCandidate>& candidates, int rows, int columns) {
  for (const auto& one : candidates) {
    if (one.row < 0 || one.row >= rows || one.column < 0 || one.column >= columns)
      throw Problem("An assignment names a row or column that it does not have.");
    if (!std::isfinite(one.cost)) throw Problem("An assignment has a cost that is not finite.");
  }
}

/// Union-find over rows [0, rows) and columns [rows, rows + columns).
class Components {
 public:
  explicit Components(int nodes) : parent_(static_cast<std::size_t>(nodes)) {
    std::iota(parent_.begin(), parent_.end(), 0);
  }
  int root(int node) {
    while (parent_[node] != node) node = parent_[node] = parent_[parent_[node]];
    return node;
  }
  void join(int left, int right) {
    const int one = root(left), other = root(right);
    parent_[std::max(one, other)] = std::min(one, other);
  }

 private:
  std::vector<int> parent_;
};

/// Rows of each component that has an edge, in order of their first row.
std::vector<std::vector<int>> components_by_rows(const Adjacency& edges, int columns) {
  const int rows = static_cast<int>(edges.size());
  Components components(rows + columns);
  for (int row = 0; row < rows; ++row)
    for (const auto& edge : edges[row]) components.join(row, rows + edge.column);
  std::vector<std::vector<int>> groups;
  std::vector<int> group_of(static_cast<std::size_t>(rows + columns), -1);
  for (int row = 0; row < rows; ++row) {
    if (edges[row].empty()) continue;
    int& group = group_of[components.root(row)];
    if (group < 0) {
      group = static_cast<int>(groups.size());
      groups.emplace_back();
    }
    groups[group].push_back(row);
  }
  return groups;
}

/// One component with its columns renumbered from 0; `columns[new] = old`.
struct Part {
  Adjacency edges;
  std::vector<int> columns;
};

Part part_of(const Adjacency& edges, const std::vector<int>& rows, std::vector<int>& number_of) {
  Part part;
  for (const int row : rows) {
    auto& own = part.edges.emplace_back();
    for (const auto& edge : edges[row]) {
      int& number = number_of[edge.column];
      if (number < 0) {
        number = static_cast<int>(part.columns.size());
        part.columns.push_back(edge.column);
      }
      own.push_back({number, edge.cost});
    }
  }
  return part;
}

Adjacency adjacency(const std::vector<AssignmentCandidate>& candidates, int rows) {
  Adjacency edges(static_cast<std::size_t>(rows));
  for (const auto& one : candidates) edges[one.row].push_back({one.column, one.cost});
  return edges;
}

}  // namespace

std::vector<int> assign_or_leave(const std::vector<AssignmentCandidate>& candidates,
                                 const std::vector<double>& row_alone,
                                 const std::vector<double>& column_alone) {
  const int rows = static_cast<int>(row_alone.size());
  const int columns = static_cast<int>(column_alone.size());
  check(candidates, rows, columns);
  // Against the cost of both staying alone only a pair that saves can be in the best assignment.
  Adjacency edges(static_cast<std::size_t>(rows));
  for (const auto& one : candidates) {
    const double saved = one.cost - row_alone[one.row] - column_alone[one.column];
    if (saved < 0) edges[one.row].push_back({one.column, saved});
  }
  std::vector<int> column_of(static_cast<std::size_t>(rows), -1);
  std::vector<int> number_of(static_cast<std::size_t>(columns), -1);
  for (const auto& group : components_by_rows(edges, columns)) {
    Part part = part_of(edges, group, number_of);
    const int real = static_cast<int>(part.columns.size());
    // A column of its own at no cost is each row's way to stay alone.
    for (std::size_t i = 0; i < group.size(); ++i)
      part.edges[i].push_back({real + static_cast<int>(i), 0});
    ShortestAugmentingPaths paths(part.edges, real + static_cast<int>(group.size()));
    paths.solve();
    for (std::size_t i = 0; i < group.size(); ++i)
      if (paths.column_of()[i] < real) column_of[group[i]] = part.columns[paths.column_of()[i]];
  }
  return column_of;
}

std::vector<int> assign_all(const std::vector<AssignmentCandidate>& candidates, int rows,
                            int columns) {
  if (rows < 0 || columns < 0) throw Problem("An assignment has a negative size.");
  check(candidates, rows, columns);
  const bool turned = rows > columns;
  auto pairs = candidates;
  if (turned)
    for (auto& one : pairs) std::swap(one.row, one.column);
  const auto edges = adjacency(pairs, turned ? columns : rows);
  ShortestAugmentingPaths paths(edges, turned ? rows : columns);
  if (!paths.solve())
    throw Problem("An assignment has no solution: too many of its pairs are forbidden.");
  if (!turned) return paths.column_of();
  std::vector<int> column_of(static_cast<std::size_t>(rows), -1);
  for (int column = 0; column < columns; ++column) column_of[paths.column_of()[column]] = column;
  return column_of;
}

}  // namespace wavefount
