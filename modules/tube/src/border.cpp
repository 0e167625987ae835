#include "wavefount/tube/border.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <optional>

#include "wavefount/core/robust.h"
#include "wavefount/tube/section.h"
#include "wavefount/tube/smooth.h"

namespace wavefount::tube {
namespace {

constexpr double none = std::numeric_limits<double>::quiet_NaN();
/// Profiles averaged to each side before the edge is looked for.
constexpr int averaged_reach = 2;

/// Median of a profile between two positions; empty when fewer than three pixels are in view.
std::optional<double> level(const Straightened& profiles, int row, double from, double to) {
  std::vector<double> values;
  const float* line = profiles.values.ptr<float>(row);
  for (int column = profiles.column(from); column <= profiles.column(to); ++column)
    if (std::isfinite(line[column])) values.push_back(line[column]);
  if (static_cast<double>(values.size()) * profiles.step < 2) return std::nullopt;
  return median(std::move(values));
}

struct Levels {
  std::vector<double> inside, outside;
};

/// Levels along the border: local, but smooth, so that nuclei and debris beside it do not count.
Levels levels_along(const Straightened& profiles, const BorderSearch& search) {
  Levels levels;
  const std::size_t count = search.expected.size();
  std::vector<double> inside_weight(count, 0.0);
  std::vector<double> outside_weight(count, 0.0);
  levels.inside.assign(count, 0);
  levels.outside.assign(count, search.outside_level);
  for (std::size_t i = 0; i < count; ++i) {
    const double at = search.expected[i];
    if (!std::isfinite(at)) continue;
    const int row = static_cast<int>(i);
    if (const auto value =
            level(profiles, row, at - search.blur - search.inside_depth, at - search.blur)) {
      levels.inside[i] = *value;
      inside_weight[i] = 1;
    }
    if (const auto value =
            level(profiles, row, at + search.blur, at + search.blur + search.outside_depth)) {
      levels.outside[i] = *value;
      outside_weight[i] = 1;
    }
  }
  levels.inside = smooth_robust(levels.inside, inside_weight, search.cutoff);
  const auto seen = std::count_if(outside_weight.begin(), outside_weight.end(),
                                  [](double one) { return one > 0; });
  if (static_cast<double>(seen) > 0.1 * static_cast<double>(count))
    levels.outside = smooth_robust(levels.outside, outside_weight, search.cutoff);
  else
    levels.outside.assign(count, search.outside_level);
  return levels;
}

/// The falling crossing of the threshold nearest to the expected place.
double crossing(const Straightened& profiles, int row, double expected, double reach,
                double threshold) {
  const float* line = profiles.values.ptr<float>(row);
  double best = none;
  double nearest = reach;
  for (int column = profiles.column(expected - reach); column < profiles.column(expected + reach);
       ++column) {
    const double here = line[column];
    const double next = line[column + 1];
    if (!(here >= threshold && next < threshold)) continue;
    const double at = profiles.across(column) + profiles.step * (here - threshold) / (here - next);
    if (std::abs(at - expected) >= nearest) continue;
    nearest = std::abs(at - expected);
    best = at;
  }
  return best;
}

double interpolated(const float* line, int columns, double at) {
  const int left = static_cast<int>(std::floor(at));
  if (left < 0 || left + 1 >= columns) return none;
  const double part = at - left;
  return (1 - part) * line[left] + part * line[left + 1];
}

/// Mean profile across the curve, levels removed profile by profile; values that too few profiles
/// hold end it.
EdgeProfile stacked(const Straightened& profiles, const BorderSearch& search, const Levels& levels,
                    const Border& border) {
  // Nearer to the axis than this the profile tells nothing of the edge.
  constexpr double axis_share = 0.1;
  EdgeProfile edge;
  edge.half_width = search.half_width;
  edge.first = search.half_width ? -(1 - axis_share) * *search.half_width
                                 : -search.blur - std::min(search.inside_depth, 12.0);
  const double last = search.blur + search.outside_depth;
  for (double away = edge.first; away <= last; away += edge.step) {
    std::vector<double> values;
    for (std::size_t i = 0; i < border.position.size(); ++i) {
      const double contrast = levels.inside[i] - levels.outside[i];
      if (border.weight[i] <= 0 || contrast <= 0) continue;
      const double value =
          interpolated(profiles.values.ptr<float>(static_cast<int>(i)), profiles.values.cols,
                       (border.position[i] + away + profiles.half) / profiles.step);
      if (std::isfinite(value)) values.push_back((value - levels.outside[i]) / contrast);
    }
    if (values.size() < 5) {
      if (away > 0) break;
      edge.first = away + edge.step;
      edge.values.clear();
      continue;
    }
    edge.values.push_back(median(std::move(values)));
  }
  return edge;
}

}  // namespace

Border find_border(const Straightened& given, const BorderSearch& search) {
  const auto profiles = averaged_along(given, averaged_reach);
  const auto levels = levels_along(profiles, search);
  const std::size_t count = search.expected.size();
  Border border;
  border.position.assign(count, 0);
  border.weight.assign(count, 0);
  double asked = 0;
  double found = 0;
  double out_of_view = 0;
  std::vector<double> contrasts;
  for (std::size_t i = 0; i < count; ++i) {
    const double expected = search.expected[i];
    if (std::isnan(expected)) continue;
    ++asked;
    if (std::isinf(expected)) {
      ++out_of_view;
      continue;
    }
    const int row = static_cast<int>(i);
    const double at =
        crossing(profiles, row, expected, search.reach, (levels.inside[i] + levels.outside[i]) / 2);
    if (std::isfinite(at)) {
      border.position[i] = at;
      border.weight[i] = 1;
      ++found;
      contrasts.push_back(levels.inside[i] - levels.outside[i]);
    }
  }
  if (asked > 0) {
    border.found_share = found / asked;
    border.out_of_view_share = out_of_view / asked;
  }
  border.contrast = median(std::move(contrasts));
  const auto raw = border.position;
  const auto had = border.weight;
  border.position = smooth_robust(raw, border.weight, search.cutoff);
  std::vector<double> rests;
  for (std::size_t i = 0; i < count; ++i)
    if (had[i] > 0) rests.push_back(raw[i] - border.position[i]);
  border.roughness = robust_sd(rests);
  if (found < 8 || !search.by_section) return border;
  const double offset = edge_offset(stacked(profiles, search, levels, border));
  for (auto& one : border.position) one += offset;
  return border;
}

}  // namespace wavefount::tube
