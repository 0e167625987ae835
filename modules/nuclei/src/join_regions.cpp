#include <algorithm>
#include <cmath>
#include <map>
#include <numbers>
#include <utility>

#include "wavefount/nuclei/region_shape.h"

namespace wavefount::nuclei {
namespace {

/// Brightness on the way from one to the other, over the dimmer one's: two nuclei seen apart dip
/// below, the texture of one seldom does.
constexpr double bright_across = 0.7;
/// Two discs that just touch fill 0.88 of their hull, one pixelated ellipse 0.95 and more.
constexpr double without_neck = 0.93;

using Pair = std::pair<int, int>;

/// The brightest way across each common border, counts.
std::map<Pair, double> passes(const cv::Mat1i& labels, const cv::Mat1f& image) {
  std::map<Pair, double> found;
  const auto look = [&](int x0, int y0, int x1, int y1) {
    const int a = labels(y0, x0);
    const int b = labels(y1, x1);
    if (a < 0 || b < 0 || a == b) return;
    const auto level = static_cast<double>(std::min(image(y0, x0), image(y1, x1)));
    const auto [at, first] = found.try_emplace(std::minmax(a, b), level);
    if (!first) at->second = std::max(at->second, level);
  };
  for (int y = 0; y < labels.rows; ++y) {
    for (int x = 0; x < labels.cols; ++x) {
      if (x + 1 < labels.cols) look(x, y, x + 1, y);
      if (y + 1 < labels.rows) look(x, y, x, y + 1);
    }
  }
  return found;
}

std::vector<Run> runs_of(const cv::Mat1i& labels, Pair pair) {
  std::vector<Run> runs;
  for (int y = 0; y < labels.rows; ++y) {
    for (int x = 0; x < labels.cols; ++x) {
      const auto in = [&](int column) {
        const int label = labels(y, column);
        return label == pair.first || label == pair.second;
      };
      if (!in(x)) continue;
      const int start = x;
      while (x < labels.cols && in(x)) ++x;
      runs.push_back({static_cast<std::uint16_t>(y), static_cast<std::uint16_t>(start),
                      static_cast<std::uint16_t>(x)});
    }
  }
  return runs;
}

double radius_of(const std::vector<Run>& runs) {
  double pixels = 0;
  for (const Run& run : runs) pixels += run.x1 - run.x0;
  return std::sqrt(pixels / std::numbers::pi);
}

bool bright_between(const Seed& a, const Seed& b, double pass) {
  const double peak = std::min(a.peak, b.peak);
  const double floor = std::max(a.half - a.peak / 2, b.half - b.peak / 2);
  return pass - floor >= bright_across * peak;
}

bool join_once(cv::Mat1i& labels, const cv::Mat1f& image, const std::vector<Seed>& seeds,
               double largest_radius) {
  Pair best{-1, -1};
  double fullest = without_neck;
  for (const auto& [pair, pass] : passes(labels, image)) {
    const Seed& a = seeds[static_cast<std::size_t>(pair.first)];
    const Seed& b = seeds[static_cast<std::size_t>(pair.second)];
    if (!bright_between(a, b, pass)) continue;
    const auto runs = runs_of(labels, pair);
    if (radius_of(runs) > largest_radius) continue;
    const double full = solidity(runs);
    if (full < fullest) continue;
    fullest = full;
    best = pair;
  }
  if (best.first < 0) return false;
  for (int& label : labels)
    if (label == best.second) label = best.first;
  return true;
}

}  // namespace

void join_regions(cv::Mat1i& labels, const cv::Mat1f& image, const std::vector<Seed>& seeds,
                  double largest_radius) {
  while (join_once(labels, image, seeds, largest_radius)) {
  }
}

}  // namespace wavefount::nuclei
