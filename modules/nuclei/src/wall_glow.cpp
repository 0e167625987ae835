#include "wavefount/nuclei/wall_glow.h"

#include <algorithm>
#include <cmath>
#include <opencv2/imgproc.hpp>
#include <vector>

namespace wavefount::nuclei {
namespace {

constexpr float no_wall = 1e6F;
constexpr double stretch_reaches = 3;
/// Quantile of the levels, and how far below the mean it lies in units of the noise.
constexpr double low_share = 0.3;
constexpr double low_depth = 0.5244;
/// With fewer pixels at one distance in a stretch no glow is taken out.
constexpr std::size_t fewest_pixels = 12;
/// A level below this share of a pixel's noise is taken for none.
constexpr double faintest_glow = 0.5;
constexpr int sides = 4;

/// Where a pixel lies with respect to the wall that is nearest to it.
struct WallPlace {
  int side = 0;   ///< wall above, below, left, right
  int along = 0;  ///< coordinate along the wall
  float distance = 0;
};

class Glow {
 public:
  Glow(const cv::Mat1f& excess, const cv::Mat1f& distance, double reach_px, double noise)
      : excess_(excess),
        distance_(distance),
        reach_(std::max(2, static_cast<int>(std::ceil(reach_px)))),
        noise_(noise) {
    const int longest = std::max(excess.cols, excess.rows);
    stretches_ = std::max(1, static_cast<int>(std::lround(longest / (stretch_reaches * reach_))));
    stretch_ = static_cast<double>(longest) / stretches_;
  }

  cv::Mat1f map() {
    if (!measure()) return {};
    cv::Mat1f glow(excess_.size(), 0.0F);
    for_near([&](int x, int y, const WallPlace& place) { glow(y, x) = level_at(place); });
    return glow;
  }

 private:
  template <class Visit>
  void for_near(Visit visit) const {
    for (int y = 0; y < distance_.rows; ++y) {
      const float* row = distance_[y];
      const float* above = distance_[std::max(y - 1, 0)];
      const float* below = distance_[std::min(y + 1, distance_.rows - 1)];
      for (int x = 0; x < distance_.cols; ++x) {
        if (row[x] <= 0 || row[x] >= static_cast<float>(reach_)) continue;
        const float right = row[std::min(x + 1, distance_.cols - 1)] - row[std::max(x - 1, 0)];
        const float down = below[x] - above[x];
        const bool upright = std::abs(right) > std::abs(down);
        const int side = upright ? (right > 0 ? 2 : 3) : (down > 0 ? 0 : 1);
        visit(x, y, WallPlace{side, upright ? y : x, row[x]});
      }
    }
  }

  std::size_t bin(int side, int stretch, int distance) const {
    return static_cast<std::size_t>((side * stretches_ + stretch) * (reach_ + 1) + distance);
  }

  /// False when nothing glows.
  bool measure() {
    std::vector<std::vector<float>> values(bin(sides - 1, stretches_ - 1, reach_) + 1);
    for_near([&](int x, int y, const WallPlace& place) {
      const int stretch = std::min(static_cast<int>(place.along / stretch_), stretches_ - 1);
      const int distance = static_cast<int>(std::lround(place.distance));
      values[bin(place.side, stretch, distance)].push_back(excess_(y, x));
    });
    level_.assign(values.size(), 0.0F);
    bool any = false;
    for (std::size_t i = 0; i < values.size(); ++i) {
      auto& bin_values = values[i];
      if (bin_values.size() < fewest_pixels) continue;
      const auto at = bin_values.begin() + static_cast<std::ptrdiff_t>(
                                               low_share * static_cast<double>(bin_values.size()));
      std::nth_element(bin_values.begin(), at, bin_values.end());
      const double level = static_cast<double>(*at) + low_depth * noise_;
      if (level < faintest_glow * noise_) continue;
      level_[i] = static_cast<float>(level);
      any = true;
    }
    return any;
  }

  float level_at(const WallPlace& place) const {
    const double at = std::clamp((place.along + 0.5) / stretch_ - 0.5, 0.0, stretches_ - 1.0);
    const int low = std::min(static_cast<int>(at), std::max(stretches_ - 2, 0));
    const int high = std::min(low + 1, stretches_ - 1);
    const auto share = static_cast<float>(at - low);
    const int near = static_cast<int>(place.distance);
    const float farther = place.distance - static_cast<float>(near);
    const auto mixed = [&](int stretch) {
      const float from = level_[bin(place.side, stretch, near)];
      const float to = level_[bin(place.side, stretch, std::min(near + 1, reach_))];
      return near == 0 ? to : from + farther * (to - from);
    };
    const float lower = mixed(low);
    return lower + share * (mixed(high) - lower);
  }

  const cv::Mat1f& excess_;
  const cv::Mat1f& distance_;
  int reach_;
  double noise_;
  int stretches_ = 1;
  double stretch_ = 1;
  std::vector<float> level_;
};

/// Two neighbouring rows or columns and the share of the second.
struct Between {
  std::size_t low = 0, high = 0;
  float share = 0;
};

Between between(double position, int size) {
  const double at = std::clamp(position, 0.0, size - 1.0);
  const auto low = static_cast<std::size_t>(at);
  return {low, std::min(low + 1, static_cast<std::size_t>(size) - 1),
          static_cast<float>(at - static_cast<double>(low))};
}

bool glows(const cv::Mat1f& glow, const Between& rows) {
  const auto lit = [&](std::size_t row) {
    const float* from = glow[static_cast<int>(row)];
    return std::any_of(from, from + glow.cols, [](float level) { return level > 0; });
  };
  return lit(rows.low) || lit(rows.high);
}

void mix_rows(const cv::Mat1f& glow, const Between& rows, std::vector<float>& mixed) {
  const float* low = glow[static_cast<int>(rows.low)];
  const float* high = glow[static_cast<int>(rows.high)];
  mixed.resize(static_cast<std::size_t>(glow.cols));
  for (std::size_t x = 0; x < mixed.size(); ++x)
    mixed[x] = low[x] + rows.share * (high[x] - low[x]);
}

}  // namespace

cv::Mat1f wall_distance(const cv::Mat1b& tubes) {
  if (cv::countNonZero(tubes) == static_cast<int>(tubes.total())) return {tubes.size(), no_wall};
  cv::Mat1f distance;
  cv::distanceTransform(tubes, distance, cv::DIST_L2, cv::DIST_MASK_3);
  return distance;
}

cv::Mat1f wall_glow(const cv::Mat1f& excess, const cv::Mat1f& wall_distance, double reach_px,
                    double noise) {
  return Glow(excess, wall_distance, reach_px, noise).map();
}

ImagePointer without_glow(const Image& full, const ReducedGrid& grid, const cv::Mat1f& glow) {
  auto image = make_image(image_width(full), image_height(full));
  std::copy_n(full.GetBufferPointer(), full.GetPixelContainer()->Size(), image->GetBufferPointer());
  cv::Mat1f pixels(as_matrix(*image));
  if (glow.empty()) return image;
  std::vector<float> row;
  for (int y = 0; y < pixels.rows; ++y) {
    const Between down = between(grid.row(y), glow.rows);
    if (!glows(glow, down)) continue;
    mix_rows(glow, down, row);
    for (int x = 0; x < pixels.cols; ++x) {
      const Between across = between(grid.column(x), glow.cols);
      pixels(y, x) -= row[across.low] + across.share * (row[across.high] - row[across.low]);
    }
  }
  return image;
}

}  // namespace wavefount::nuclei
