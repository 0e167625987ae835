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
/// A region that borders others along more than this share of its rim, and is smaller than this
/// share of the one beside it, is a bright patch of it (or the overlap of two), not a nucleus: of a
/// small nucleus that touches a large one most of the rim is free.
constexpr double patch_rim = 0.45;
constexpr double patch_area = 0.45;

using Pair = std::pair<int, int>;

/// A common border of two regions, in pixel sides, and the brightest way across, counts.
struct Border {
  int length = 0;
  double pass = 0;
};

struct Region {
  int pixels = 0;
  int rim = 0;     ///< pixel sides towards anything else
  int shared = 0;  ///< of these, towards other regions
};

struct Map {
  std::vector<Region> regions;
  std::map<Pair, Border> borders;
};

class Surveyor {
 public:
  Surveyor(const cv::Mat1i& labels, const cv::Mat1f& image, std::size_t count)
      : labels_(labels), image_(image) {
    map_.regions.resize(count);
  }

  Map run() {
    for (int y = 0; y < labels_.rows; ++y) {
      for (int x = 0; x < labels_.cols; ++x) {
        if (labels_(y, x) >= 0) ++region(labels_(y, x)).pixels;
        if (x + 1 < labels_.cols) side(x, y, x + 1, y);
        if (y + 1 < labels_.rows) side(x, y, x, y + 1);
      }
    }
    return std::move(map_);
  }

 private:
  Region& region(int label) { return map_.regions[static_cast<std::size_t>(label)]; }

  void side(int x0, int y0, int x1, int y1) {
    const int a = labels_(y0, x0);
    const int b = labels_(y1, x1);
    if (a == b) return;
    for (const int label : {a, b}) {
      if (label < 0) continue;
      ++region(label).rim;
      if (a >= 0 && b >= 0) ++region(label).shared;
    }
    if (a < 0 || b < 0) return;
    const auto level = static_cast<double>(std::min(image_(y0, x0), image_(y1, x1)));
    Border& border = map_.borders.try_emplace(std::minmax(a, b), Border{0, level}).first->second;
    ++border.length;
    border.pass = std::max(border.pass, level);
  }

  const cv::Mat1i& labels_;
  const cv::Mat1f& image_;
  Map map_;
};

std::vector<Run> runs_of(const cv::Mat1i& labels, Pair pair, const cv::Rect& box) {
  std::vector<Run> runs;
  const int right = box.x + box.width;
  for (int y = box.y; y < box.y + box.height; ++y) {
    for (int x = box.x; x < right; ++x) {
      const auto in = [&](int column) {
        const int label = labels(y, column);
        return label == pair.first || label == pair.second;
      };
      if (!in(x)) continue;
      const int start = x;
      while (x < right && in(x)) ++x;
      runs.push_back({static_cast<std::uint16_t>(y), static_cast<std::uint16_t>(start),
                      static_cast<std::uint16_t>(x)});
    }
  }
  return runs;
}

bool bright_between(const Seed& a, const Seed& b, double pass) {
  const double peak = std::min(a.peak, b.peak);
  const double floor = std::max(a.half - a.peak / 2, b.half - b.peak / 2);
  return pass - floor >= bright_across * peak;
}

class Joining {
 public:
  Joining(cv::Mat1i& labels, const cv::Mat1f& image, const std::vector<Seed>& seeds,
          double largest_radius)
      : labels_(labels), image_(image), seeds_(seeds), largest_radius_(largest_radius) {}

  /// One step: the smallest patch goes to the region that it borders most, else the pair that
  /// looks most like one nucleus is joined. False when nothing is left to do.
  bool step() {
    map_ = Surveyor(labels_, image_, seeds_.size()).run();
    if (map_.borders.empty()) return false;
    return absorb_patch() || join_pair();
  }

 private:
  const Region& region(int label) const { return map_.regions[static_cast<std::size_t>(label)]; }
  const Seed& seed(int label) const { return seeds_[static_cast<std::size_t>(label)]; }

  void rename(int from, int to) {
    for (int& label : labels_)
      if (label == from) label = to;
  }

  bool absorb_patch() {
    int patch = -1;
    int host = -1;
    int longest = 0;
    for (const auto& [pair, border] : map_.borders) {
      const bool first = region(pair.first).pixels < region(pair.second).pixels;
      const int small = first ? pair.first : pair.second;
      const int large = first ? pair.second : pair.first;
      if (region(small).pixels > patch_area * region(large).pixels) continue;
      if (region(small).shared < patch_rim * region(small).rim) continue;
      const bool smaller = patch < 0 || region(small).pixels < region(patch).pixels;
      if (!smaller && !(small == patch && border.length > longest)) continue;
      patch = small;
      host = large;
      longest = border.length;
    }
    if (patch < 0) return false;
    rename(patch, host);
    return true;
  }

  bool join_pair() {
    const auto boxes = boxes_of(labels_, seeds_.size());
    Pair best{-1, -1};
    double fullest = without_neck;
    for (const auto& [pair, border] : map_.borders) {
      const double pixels = region(pair.first).pixels + region(pair.second).pixels;
      if (std::sqrt(pixels / std::numbers::pi) > largest_radius_) continue;
      if (!bright_between(seed(pair.first), seed(pair.second), border.pass)) continue;
      const cv::Rect box = boxes[static_cast<std::size_t>(pair.first)] |
                           boxes[static_cast<std::size_t>(pair.second)];
      const double full = solidity(runs_of(labels_, pair, box));
      if (full < fullest) continue;
      fullest = full;
      best = pair;
    }
    if (best.first < 0) return false;
    rename(best.second, best.first);
    return true;
  }

  cv::Mat1i& labels_;
  const cv::Mat1f& image_;
  const std::vector<Seed>& seeds_;
  double largest_radius_;
  Map map_;
};

}  // namespace

void join_regions(cv::Mat1i& labels, const cv::Mat1f& image, const std::vector<Seed>& seeds,
                  double largest_radius) {
  Joining joining(labels, image, seeds, largest_radius);
  while (joining.step()) {
  }
}

}  // namespace wavefount::nuclei
