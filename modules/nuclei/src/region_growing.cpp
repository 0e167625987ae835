#include "wavefount/nuclei/region_growing.h"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <limits>
#include <opencv2/imgproc.hpp>
#include <queue>

namespace wavefount::nuclei {
namespace {

constexpr int none = -1;
/// A seed covers its pixels up to this share of its radius.
constexpr double seed_share = 0.5;
constexpr int steps_x[] = {1, -1, 0, 0};
constexpr int steps_y[] = {0, 0, 1, -1};

double squared(double value) {
  return value * value;
}

double reach_of(const Seed& seed) {
  return 2 * seed.radius + 2;
}

/// Calls visit(x, y, squared distance) for the window's pixels within `reach` of a seed.
template <class Visit>
void for_disc(const cv::Size& size, const Seed& seed, double reach, Visit visit) {
  const int x0 = std::max(0, static_cast<int>(std::ceil(seed.x - reach)));
  const int x1 = std::min(size.width - 1, static_cast<int>(std::floor(seed.x + reach)));
  const int y0 = std::max(0, static_cast<int>(std::ceil(seed.y - reach)));
  const int y1 = std::min(size.height - 1, static_cast<int>(std::floor(seed.y + reach)));
  for (int y = y0; y <= y1; ++y) {
    for (int x = x0; x <= x1; ++x) {
      const double distance = squared(x - seed.x) + squared(y - seed.y);
      if (distance <= reach * reach) visit(x, y, distance);
    }
  }
}

class Growth {
 public:
  Growth(const cv::Mat1f& image, const std::vector<Seed>& seeds)
      : image_(image), seeds_(seeds), labels_(image.size(), none) {}

  cv::Mat1i run() {
    if (seeds_.size() > 1) rank_pixels();
    plant();
    if (seeds_.size() == 1)
      flood_alone();
    else
      flood();
    fill_holes();
    return labels_;
  }

 private:
  struct Front {
    float rank;
    std::uint32_t order;
    std::int32_t x, y, label;
    bool operator<(const Front& other) const {
      return rank != other.rank ? rank < other.rank : order > other.order;
    }
  };

  /// The order of the flood: brightness over the peak, capped at it, plus the distance to the
  /// common outline over the radius; both of the seed that is nearest for its size, so that no seed
  /// sees another's nucleus brighter than its own.
  void rank_pixels() {
    cv::Mat1f nearest(image_.size(), std::numeric_limits<float>::infinity());
    cv::Mat1b bright(image_.size(), static_cast<unsigned char>(0));
    cv::Mat1f scale(image_.size(), 0.0F);
    cv::Mat1f level(image_.size(), 0.0F);
    for (const Seed& seed : seeds_) {
      const double floor = seed.half - seed.peak / 2;
      for_disc(image_.size(), seed, reach_of(seed), [&](int x, int y, double distance) {
        const auto apart = static_cast<float>(distance / squared(seed.radius));
        if (apart >= nearest(y, x) || seed.peak <= 0) return;
        const auto value = static_cast<double>(image_(y, x));
        nearest(y, x) = apart;
        bright(y, x) = value >= seed.half ? 255 : 0;
        scale(y, x) = static_cast<float>(1 / seed.radius);
        level(y, x) = static_cast<float>(std::min((value - floor) / seed.peak, 1.0));
      });
    }
    cv::distanceTransform(bright, rank_, cv::DIST_L2, cv::DIST_MASK_5);
    cv::multiply(rank_, scale, rank_);
    cv::add(rank_, level, rank_);
  }

  /// Each seed's core; where cores meet, the seed nearest for its size has the pixel.
  void plant() {
    cv::Mat1f nearest(image_.size(), std::numeric_limits<float>::infinity());
    for (std::size_t i = 0; i < seeds_.size(); ++i) {
      const Seed& seed = seeds_[i];
      const double reach = std::max(seed_share * seed.radius, 0.75);
      for_disc(image_.size(), seed, reach, [&](int x, int y, double distance) {
        const auto apart = static_cast<float>(distance / squared(seed.radius));
        if (static_cast<double>(image_(y, x)) < seed.half || apart >= nearest(y, x)) return;
        nearest(y, x) = apart;
        labels_(y, x) = static_cast<int>(i);
      });
    }
    for (int y = 0; y < labels_.rows; ++y) {
      for (int x = 0; x < labels_.cols; ++x) {
        if (labels_(y, x) < 0) continue;
        if (seeds_.size() == 1)
          open_.emplace_back(x, y);
        else
          spread(x, y, labels_(y, x));
      }
    }
  }

  void spread(int x, int y, int label) {
    const Seed& seed = seeds_[static_cast<std::size_t>(label)];
    for (int i = 0; i < 4; ++i) {
      const int to_x = x + steps_x[i];
      const int to_y = y + steps_y[i];
      if (to_x < 0 || to_y < 0 || to_x >= labels_.cols || to_y >= labels_.rows) continue;
      if (labels_(to_y, to_x) != none) continue;
      if (static_cast<double>(image_(to_y, to_x)) < seed.half) continue;
      if (squared(to_x - seed.x) + squared(to_y - seed.y) > squared(reach_of(seed))) continue;
      fronts_.push({rank_(to_y, to_x), order_++, to_x, to_y, label});
    }
  }

  /// Without a rival there is no order to keep.
  void flood_alone() {
    const Seed& seed = seeds_.front();
    const double reach = squared(reach_of(seed));
    while (!open_.empty()) {
      const cv::Point from = open_.back();
      open_.pop_back();
      for (int i = 0; i < 4; ++i) {
        const int x = from.x + steps_x[i];
        const int y = from.y + steps_y[i];
        if (x < 0 || y < 0 || x >= labels_.cols || y >= labels_.rows) continue;
        if (labels_(y, x) != none || static_cast<double>(image_(y, x)) < seed.half) continue;
        if (squared(x - seed.x) + squared(y - seed.y) > reach) continue;
        labels_(y, x) = 0;
        open_.emplace_back(x, y);
      }
    }
  }

  void flood() {
    while (!fronts_.empty()) {
      const Front front = fronts_.top();
      fronts_.pop();
      int& label = labels_(front.y, front.x);
      if (label != none) continue;
      label = front.label;
      spread(front.x, front.y, front.label);
    }
  }

  /// Gives each hole inside one nucleus to it; a gap that several enclose is cytoplasm.
  void fill_holes() {
    const auto boxes = boxes_of(labels_, seeds_.size());
    for (std::size_t i = 0; i < boxes.size(); ++i)
      if (boxes[i].width > 2 && boxes[i].height > 2) fill_holes(static_cast<int>(i), boxes[i]);
  }

  /// What is free inside the label's box and cannot be reached from the box's rim is a hole.
  void fill_holes(int label, const cv::Rect& box) {
    cv::Mat1i inner = labels_(box);
    cv::Mat1b seen(inner.size(), static_cast<unsigned char>(0));
    open_.clear();
    const auto reach = [&](int x, int y) {
      if (x < 0 || y < 0 || x >= inner.cols || y >= inner.rows) return;
      if (inner(y, x) == label || seen(y, x) != 0) return;
      seen(y, x) = 1;
      open_.emplace_back(x, y);
    };
    for (int x = 0; x < inner.cols; ++x) {
      reach(x, 0);
      reach(x, inner.rows - 1);
    }
    for (int y = 0; y < inner.rows; ++y) {
      reach(0, y);
      reach(inner.cols - 1, y);
    }
    while (!open_.empty()) {
      const cv::Point from = open_.back();
      open_.pop_back();
      for (int i = 0; i < 4; ++i) reach(from.x + steps_x[i], from.y + steps_y[i]);
    }
    for (int y = 0; y < inner.rows; ++y)
      for (int x = 0; x < inner.cols; ++x)
        if (inner(y, x) == none && seen(y, x) == 0) inner(y, x) = label;
  }

  const cv::Mat1f& image_;
  const std::vector<Seed>& seeds_;
  cv::Mat1i labels_;
  cv::Mat1f rank_;
  std::priority_queue<Front> fronts_;
  std::uint32_t order_ = 0;
  std::vector<cv::Point> open_;
};

}  // namespace

std::vector<cv::Rect> boxes_of(const cv::Mat1i& labels, std::size_t count) {
  struct Box {
    int x0 = std::numeric_limits<int>::max(), y0 = 0, x1 = -1, y1 = -1;
  };
  std::vector<Box> boxes(count);
  for (int y = 0; y < labels.rows; ++y) {
    const int* row = labels[y];
    for (int x = 0; x < labels.cols; ++x) {
      if (row[x] < 0) continue;
      Box& box = boxes[static_cast<std::size_t>(row[x])];
      if (box.y1 < 0) box.y0 = y;
      box.y1 = y;
      box.x0 = std::min(box.x0, x);
      box.x1 = std::max(box.x1, x);
    }
  }
  std::vector<cv::Rect> rects;
  for (const Box& box : boxes)
    rects.push_back(box.y1 < 0
                        ? cv::Rect()
                        : cv::Rect(box.x0, box.y0, box.x1 - box.x0 + 1, box.y1 - box.y0 + 1));
  return rects;
}

cv::Mat1i grow_regions(const cv::Mat1f& image, const std::vector<Seed>& seeds) {
  return Growth(image, seeds).run();
}

}  // namespace wavefount::nuclei
