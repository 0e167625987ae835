#include "wavefount/tube/border.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <optional>

#include "wavefount/core/robust.h"
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
    const double at =
        profiles.across(column) + profiles.step * (here - threshold) / (here - next);
    if (std::abs(at - expected) >= nearest) continue;
    nearest = std::abs(at - expected);
    best = at;
  }
  return best;
}

/// Mean profile around the curve, levels removed profile by profile.
void correct_glow(const Straightened& profiles, const BorderSearch& search, const Levels& levels,
                  Border& border) {
  constexpr double step = 0.25;
  const double before = search.blur + std::min(search.inside_depth, 8.0);
  const double after = search.blur + std::min(search.outside_depth, 8.0);
  const auto bins = static_cast<std::size_t>((before + after) / step) + 1;
  std::vector<std::vector<double>> stacked(bins);
  for (std::size_t i = 0; i < border.position.size(); ++i) {
    const double contrast = levels.inside[i] - levels.outside[i];
    if (border.weight[i] <= 0 || contrast <= 0) continue;
    const float* line = profiles.values.ptr<float>(static_cast<int>(i));
    for (int column = 0; column < profiles.values.cols; ++column) {
      const double at = profiles.across(column) - border.position[i] + before;
      if (at < 0 || at >= before + after || !std::isfinite(line[column])) continue;
      const auto bin = static_cast<std::size_t>(std::lround(at / step));
      if (bin < bins) stacked[bin].push_back((line[column] - levels.outside[i]) / contrast);
    }
  }
  std::vector<double> profile;
  for (auto& bin : stacked) {
    if (bin.size() < 5) return;
    profile.push_back(median(std::move(bin)));
  }
  const double offset = glow_offset(profile, step, before, 1, 0);
  for (auto& one : border.position) one -= offset;
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
    const double at = crossing(profiles, row, expected, search.reach,
                               (levels.inside[i] + levels.outside[i]) / 2);
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
  if (found >= 8) correct_glow(profiles, search, levels, border);
  return border;
}

}  // namespace wavefount::tube
