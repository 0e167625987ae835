#include <gtest/gtest.h>

#include <algorithm>
#include <chrono>
#include <cmath>
#include <cstdio>
#include <limits>
#include <random>

#include "wavefount/core/problem.h"
#include "wavefount/tracking/assignment.h"

namespace wavefount {
namespace {

struct Pairing {
  int rows = 0, columns = 0;
  std::vector<AssignmentCandidate> candidates;
  std::vector<double> row_alone, column_alone;
};

double cost_of(const Pairing& problem, const std::vector<int>& column_of) {
  double sum = 0;
  std::vector<bool> taken(problem.column_alone.size(), false);
  for (int row = 0; row < problem.rows; ++row) {
    if (column_of[row] < 0) {
      sum += problem.row_alone[row];
      continue;
    }
    EXPECT_FALSE(taken[column_of[row]]);
    taken[column_of[row]] = true;
    double pair = std::numeric_limits<double>::infinity();
    for (const auto& one : problem.candidates)
      if (one.row == row && one.column == column_of[row]) pair = std::min(pair, one.cost);
    sum += pair;
  }
  for (int column = 0; column < problem.columns; ++column)
    if (!taken[column]) sum += problem.column_alone[column];
  return sum;
}

/// Every way to pair rows from `row` on.
double best_by_trying(const Pairing& problem, std::vector<int>& column_of, int row) {
  if (row == problem.rows) return cost_of(problem, column_of);
  column_of[row] = -1;
  double best = best_by_trying(problem, column_of, row + 1);
  for (const auto& one : problem.candidates) {
    if (one.row != row) continue;
    if (std::find(column_of.begin(), column_of.begin() + row, one.column) !=
        column_of.begin() + row)
      continue;
    column_of[row] = one.column;
    best = std::min(best, best_by_trying(problem, column_of, row + 1));
  }
  column_of[row] = -1;
  return best;
}

Pairing random_problem(std::mt19937& random, bool degenerate) {
  Pairing problem;
  problem.rows = static_cast<int>(random() % 7);
  problem.columns = static_cast<int>(random() % 7);
  const auto draw = [&] {
    return degenerate ? static_cast<double>(random() % 3)
                      : static_cast<double>(random() % 20001) / 1000 - 10;
  };
  const auto density = random() % 100;
  for (int row = 0; row < problem.rows; ++row)
    for (int column = 0; column < problem.columns; ++column)
      if (random() % 100 < density + 10) problem.candidates.push_back({row, column, draw()});
  for (int row = 0; row < problem.rows; ++row) problem.row_alone.push_back(draw());
  for (int column = 0; column < problem.columns; ++column) problem.column_alone.push_back(draw());
  return problem;
}

TEST(Assignment, AgreesWithTryingAllOnRandomAndDegenerateCosts) {
  std::mt19937 random(5);
  for (int i = 0; i < 4000; ++i) {
    const auto problem = random_problem(random, i % 2 == 0);
    const auto found = assign_or_leave(problem.candidates, problem.row_alone, problem.column_alone);
    std::vector<int> tried(static_cast<std::size_t>(problem.rows), -1);
    const double best = best_by_trying(problem, tried, 0);
    ASSERT_NEAR(cost_of(problem, found), best, 1e-9) << "problem " << i;
  }
}

TEST(Assignment, FullAssignmentAgreesWithPermutationsAtAnyShape) {
  std::mt19937 random(11);
  for (int i = 0; i < 2000; ++i) {
    Pairing problem;
    problem.rows = 1 + static_cast<int>(random() % 6);
    problem.columns = 1 + static_cast<int>(random() % 6);
    for (int row = 0; row < problem.rows; ++row)
      for (int column = 0; column < problem.columns; ++column)
        problem.candidates.push_back({row, column, static_cast<double>(random() % 5) - 2});
    // Staying alone is so dear that trying all makes as many pairs as there can be.
    problem.row_alone.assign(static_cast<std::size_t>(problem.rows), 1000);
    problem.column_alone.assign(static_cast<std::size_t>(problem.columns), 1000);
    const auto found = assign_all(problem.candidates, problem.rows, problem.columns);
    std::vector<int> tried(static_cast<std::size_t>(problem.rows), -1);
    ASSERT_NEAR(cost_of(problem, found), best_by_trying(problem, tried, 0), 1e-9);
  }
}

TEST(Assignment, SaysWhenForbiddenPairsLeaveNoSolution) {
  EXPECT_THROW(assign_all({{0, 0, 1}, {1, 0, 1}}, 2, 2), Problem);
  EXPECT_THROW(assign_all({{0, 5, 1}}, 1, 1), Problem);
  EXPECT_THROW(assign_all({{0, 0, std::nan("")}}, 1, 1), Problem);
  EXPECT_TRUE(assign_all({}, 0, 3).empty());
  EXPECT_EQ(assign_all({}, 2, 0), (std::vector<int>{-1, -1}));
}

TEST(Assignment, PairThatCostsAsMuchAsStayingAloneIsLeft) {
  EXPECT_EQ(assign_or_leave({{0, 0, 2}}, {1}, {1}), (std::vector<int>{-1}));
  EXPECT_EQ(assign_or_leave({{0, 0, 1.9}}, {1}, {1}), (std::vector<int>{0}));
}

TEST(Assignment, ThousandsOfSmallProblemsTakeWellUnderASecond) {
  std::mt19937 random(3);
  std::vector<AssignmentCandidate> candidates;
  const int frames = 2000, nuclei = 40;
  for (int frame = 0; frame < frames; ++frame)
    for (int row = 0; row < nuclei; ++row)
      for (int k = -1; k <= 1; ++k) {
        const int column = (row + k + nuclei) % nuclei;
        candidates.push_back(
            {frame * nuclei + row, frame * nuclei + column, static_cast<double>(random() % 1000)});
      }
  const std::vector<double> alone(static_cast<std::size_t>(frames) * nuclei, 600);
  const auto start = std::chrono::steady_clock::now();
  const auto found = assign_or_leave(candidates, alone, alone);
  const std::chrono::duration<double> took = std::chrono::steady_clock::now() - start;
  std::printf("assignment of %d x %d: %.3f s\n", frames, nuclei, took.count());
  EXPECT_LT(took.count(), 1.0);
  EXPECT_EQ(found.size(), alone.size());
}

}  // namespace
}  // namespace wavefount
