#include "flow.h"

#include <algorithm>
#include <cmath>

namespace wavefount::tracking {
namespace {

/// Time over which flow in a tube keeps its course: well below a cell cycle, long enough that
/// several nuclei's displacements stand above the error of their places.
constexpr double steady_min = 6;
/// Bins in time and cells in space never exceed these, however long the film: the field is smooth.
constexpr int most_bins = 400;
constexpr int most_cells = 1000;
/// Standard deviation of a displacement's weight: bins in time, cells of half a spacing in space.
constexpr double reach_bins = 1;
constexpr double reach_cells = 3;

}  // namespace

Flow::Flow(const FilmDetections& film, const std::vector<Link>& links, std::vector<Point> common)
    : common_(std::move(common)), time_min_(film.time_min) {
  common_until_ = common_;
  for (std::size_t i = 1; i < common_until_.size(); ++i)
    common_until_[i] = common_until_[i - 1] + common_until_[i];
  if (links.empty()) return;
  double right = -1e300, bottom = -1e300;
  left_um_ = top_um_ = 1e300;
  for (const auto& one : film.all) {
    left_um_ = std::min(left_um_, one.place_um.x);
    top_um_ = std::min(top_um_, one.place_um.y);
    right = std::max(right, one.place_um.x);
    bottom = std::max(bottom, one.place_um.y);
  }
  start_min_ = time_min_.front();
  bin_min_ = std::max({steady_min, 2 * film.interval_min, film.duration_min() / most_bins});
  bins_ = static_cast<int>(film.duration_min() / bin_min_) + 1;
  cell_um_ = std::max(film.spacing_um / 2,
                      std::sqrt((right - left_um_ + 1) * (bottom - top_um_ + 1) / most_cells));
  across_ = static_cast<int>((right - left_um_) / cell_um_) + 1;
  down_ = static_cast<int>((bottom - top_um_) / cell_um_) + 1;
  auto sums = collect(film, links);
  spread(sums, 1, across_, reach_cells);
  spread(sums, across_, down_, reach_cells);
  spread(sums, across_ * down_, bins_, reach_bins);
  // One nucleus' worth of time at rest is added, so that a lone nucleus' own wandering is not taken
  // for flow.
  for (const auto& sum : sums)
    velocity_.push_back((1 / (sum.time_min + bin_min_)) * sum.displacement);
}

int Flow::bin_of(double time_min) const {
  return std::clamp(static_cast<int>((time_min - start_min_) / bin_min_), 0, bins_ - 1);
}

int Flow::cell_of(Point place) const {
  const auto index = [&](double from, double at, int count) {
    return static_cast<int>(std::clamp(std::floor((at - from) / cell_um_), 0.0, count - 1.0));
  };
  return index(top_um_, place.y, down_) * across_ + index(left_um_, place.x, across_);
}

std::vector<Flow::Sums> Flow::collect(const FilmDetections& film,
                                      const std::vector<Link>& links) const {
  std::vector<Sums> sums(static_cast<std::size_t>(bins_) * across_ * down_);
  for (const auto& link : links) {
    const auto& from = film.all[link.from];
    const auto& to = film.all[link.to];
    Point moved = to.place_um - from.place_um;
    moved = moved - (common_until_[to.step] - common_until_[from.step]);
    const double middle = (time_min_[from.step] + time_min_[to.step]) / 2;
    auto& sum = sums[bin_of(middle) * across_ * down_ + cell_of(from.place_um)];
    sum.displacement = sum.displacement + moved;
    sum.time_min += time_min_[to.step] - time_min_[from.step];
  }
  return sums;
}

/// Replaces every line of `count` sums, `stride` apart, by Gaussian-weighted sums along it.
void Flow::spread(std::vector<Sums>& sums, int stride, int count, double sd) {
  if (count < 2) return;
  const int reach = std::min(count - 1, static_cast<int>(std::ceil(3 * sd)));
  std::vector<double> weight;
  for (int i = 0; i <= reach; ++i) weight.push_back(std::exp(-i * i / (2 * sd * sd)));
  std::vector<Sums> line(static_cast<std::size_t>(count));
  for (int start = 0; start < static_cast<int>(sums.size()); ++start) {
    if (start / stride % count != 0) continue;
    for (int i = 0; i < count; ++i) {
      Sums& sum = line[i] = {};
      for (int j = std::max(0, i - reach); j <= std::min(count - 1, i + reach); ++j) {
        const auto& other = sums[start + j * stride];
        sum.displacement = sum.displacement + weight[std::abs(i - j)] * other.displacement;
        sum.time_min += weight[std::abs(i - j)] * other.time_min;
      }
    }
    for (int i = 0; i < count; ++i) sums[start + i * stride] = line[i];
  }
}

Point Flow::shift(Point place, int from, int to) const {
  Point total;
  if (!common_until_.empty()) total = common_until_[to] - common_until_[from];
  if (velocity_.empty()) return total;
  const int cell = cell_of(place);
  const double start = time_min_[from], end = time_min_[to];
  for (int bin = bin_of(start); bin <= bin_of(end); ++bin) {
    const double bin_start = start_min_ + bin * bin_min_;
    const double last = bin == bins_ - 1 ? end : std::min(end, bin_start + bin_min_);
    const double share = last - std::max(start, bin_start);
    if (share > 0) total = total + share * velocity_[bin * across_ * down_ + cell];
  }
  return total;
}

}  // namespace wavefount::tracking
