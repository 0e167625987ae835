#include "wavefount/tube/tube_shape.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <opencv2/imgproc.hpp>
#include <utility>

#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"

namespace wavefount::tube {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double none = std::numeric_limits<double>::quiet_NaN();
/// The axis and its walls in turn until they no longer move each other.
constexpr int rounds = 3;
/// An end or a wall is open when more than this share of its profiles leave the image.
constexpr double open_share = 0.5;
/// In between, or with an edge found in fewer profiles than this, a person should look.
constexpr double doubtful_share = 0.15;
constexpr double least_found_share = 0.7;

Straightened flipped(const Straightened& profiles) {
  Straightened out = profiles;
  out.values = cv::Mat();  // else the copy would share, and turn, the original's pixels
  cv::flip(profiles.values, out.values, 1);
  return out;
}

/// First and last position of the region along a profile, from the middle outwards; infinite where
/// it reaches out of the image.
std::pair<double, double> run(const Straightened& mask, int row, double middle) {
  const float* line = mask.values.ptr<float>(row);
  const int centre = mask.column(middle);
  if (!(line[centre] > 127)) return {none, none};
  int low = centre;
  int high = centre;
  while (low > 0 && line[low - 1] > 127) --low;
  while (high + 1 < mask.values.cols && line[high + 1] > 127) ++high;
  const bool cut_low = low == 0 || std::isnan(line[low - 1]);
  const bool cut_high = high + 1 == mask.values.cols || std::isnan(line[high + 1]);
  return {cut_low ? -infinity : mask.across(low) - mask.step / 2,
          cut_high ? infinity : mask.across(high) + mask.step / 2};
}

struct Walls {
  Border upper, lower;         ///< positions as distances from the axis to that side
  double first = 0, last = 0;  ///< stations between which the region covers the axis
  double half = 0;             ///< usual half width
};

class TubeMeasure {
 public:
  TubeMeasure(const cv::Mat& image, const cv::Mat& region, const ShapeRequest& request)
      : image_(image), request_(request) {
    region.convertTo(mask_, CV_32F);
    const double area = static_cast<double>(cv::countNonZero(region));
    axis_ = rough_axis(region);
    half_ = std::max(3.0, area / static_cast<double>(axis_.size()) / 2);
  }

  TubeShape measure() {
    for (int round = 0; round < rounds; ++round) {
      lay_out();
      find_walls(round + 1 == rounds);
      if (round + 1 < rounds) centre_axis();
    }
    TubeShape shape;
    decide_walls(shape);
    const auto left = find_end(false, shape);
    const auto right = find_end(true, shape);
    draw(left, right, shape);
    return shape;
  }

 private:
  struct Cap {
    Boundary kind = Boundary::closed;
    double station = 0;        ///< where the axis ends
    std::vector<Point> curve;  ///< (station, across) from upper to lower wall
  };

  /// Straightens image and mask along the axis, which is continued beyond both ends.
  void lay_out() {
    pad_ = half_ + 25;
    axis_ = extended(axis_, pad_, std::max(half_, 10.0));
    const double span = 1.6 * half_ + 25;
    pixels_ = straighten(image_, axis_, span, 0.5);
    cover_ = straighten(mask_, axis_, span, 0.5);
  }

  void find_walls(bool by_section) {
    const std::size_t count = axis_.size();
    BorderSearch upper = search();
    BorderSearch lower = search();
    upper.expected.assign(count, none);
    lower.expected.assign(count, none);
    std::vector<std::size_t> covered;
    for (std::size_t i = 0; i < count; ++i) {
      const auto [low, high] = run(cover_, static_cast<int>(i), 0);
      if (std::isnan(low)) continue;
      covered.push_back(i);
      upper.expected[i] = -low;
      lower.expected[i] = high;
    }
    if (covered.empty()) covered = {0, count - 1};
    walls_.first = static_cast<double>(covered.front());
    walls_.last = static_cast<double>(covered.back());
    // Round ends: their walls bend inwards and are the ends' business.
    const double margin = std::min(0.6 * half_, (walls_.last - walls_.first) / 4);
    for (std::size_t i = 0; i < count; ++i) {
      const double at = static_cast<double>(i);
      if (at >= walls_.first + margin && at <= walls_.last - margin) continue;
      upper.expected[i] = lower.expected[i] = none;
    }
    upper.half_width = lower.half_width = half_;
    upper.by_section = lower.by_section = by_section;
    walls_.upper = find_border(flipped(pixels_), upper);
    walls_.lower = find_border(pixels_, lower);
  }

  BorderSearch search() const {
    BorderSearch search;
    search.reach = std::clamp(0.35 * half_, 4.0, 15.0);
    search.inside_depth = std::max(4.0, 0.8 * half_);
    search.outside_depth = 12;
    search.outside_level = request_.outside_level;
    search.blur = std::max(2.0, request_.thin / 2);
    search.cutoff = std::max(4 * half_, 60.0);
    return search;
  }

  bool in_view(const Border& wall) const {
    return wall.found_share > 0.2 && wall.out_of_view_share < open_share + 0.25;
  }

  /// Distance of a wall from the axis; where it is out of view, beyond the image.
  double wall(bool upper, std::size_t station) const {
    const auto& border = upper ? walls_.upper : walls_.lower;
    if (in_view(border)) return border.position[station];
    return static_cast<double>(image_.cols + image_.rows);
  }

  void centre_axis() {
    const bool up = in_view(walls_.upper);
    const bool down = in_view(walls_.lower);
    if (up && down) half_ = usual_half();
    if (request_.width) half_ = *request_.width / 2;
    if (!up && !down) return trim();
    Polygon moved;
    for (std::size_t i = 0; i < axis_.size(); ++i) {
      double across = 0;
      if (up && down)
        across = (walls_.lower.position[i] - walls_.upper.position[i]) / 2;
      else
        across = up ? half_ - walls_.upper.position[i] : walls_.lower.position[i] - half_;
      moved.push_back(axis_.place(static_cast<double>(i), across));
    }
    keep_covered(moved);
  }

  void trim() { keep_covered(axis_.points); }

  void keep_covered(const Polygon& points) {
    const auto from = static_cast<std::ptrdiff_t>(walls_.first);
    const auto to = static_cast<std::ptrdiff_t>(walls_.last);
    if (to - from < 2) return;
    axis_ = axis_through(Polygon(points.begin() + from, points.begin() + to + 1));
  }

  double usual_half() const {
    std::vector<double> halves;
    for (std::size_t i = 0; i < axis_.size(); ++i)
      if (walls_.upper.weight[i] > 0 && walls_.lower.weight[i] > 0)
        halves.push_back((walls_.upper.position[i] + walls_.lower.position[i]) / 2);
    return halves.empty() ? half_ : std::max(2.0, median(std::move(halves)));
  }

  void decide_wall(const Border& border, const std::string& name, Boundary& kind,
                   TubeShape& shape) const {
    kind = in_view(border) ? Boundary::closed : Boundary::open;
    if (kind == Boundary::open) return;
    if (border.out_of_view_share > doubtful_share)
      shape.doubts.push_back("Part of the " + name + " wall runs out of the image.");
    else if (border.found_share < least_found_share)
      shape.doubts.push_back("The " + name + " wall shows in only " +
                             rounded_text(100 * border.found_share, 2) + " % of its length.");
    if (border.roughness > std::max(1.5, 0.06 * half_))
      shape.doubts.push_back("The " + name + " wall is irregular.");
  }

  void decide_walls(TubeShape& shape) {
    decide_wall(walls_.upper, "upper", shape.upper_wall, shape);
    decide_wall(walls_.lower, "lower", shape.lower_wall, shape);
    const bool both = shape.upper_wall == Boundary::closed && shape.lower_wall == Boundary::closed;
    if (both) half_ = usual_half();
    shape.width = 2 * half_;
    if (!request_.width) return;
    shape.width = *request_.width;
    half_ = shape.width / 2;
    if (shape.upper_wall == Boundary::closed)
      std::fill(walls_.upper.position.begin(), walls_.upper.position.end(), half_);
    if (shape.lower_wall == Boundary::closed)
      std::fill(walls_.lower.position.begin(), walls_.lower.position.end(), half_);
  }

  /// Profiles along the axis, one for each pixel across; rising outwards.
  Straightened lengthwise(const Straightened& sideways, double from, double to, bool right) const {
    Straightened out;
    const int first = sideways.column(from);
    const int last = sideways.column(to);
    cv::Mat part;
    cv::transpose(sideways.values.colRange(first, last + 1), part);
    if (!right) cv::flip(part, part, 1);
    out.values = part;
    out.step = 1;
    out.half = 0;
    return out;
  }

  Cap find_end(bool right, TubeShape& shape) {
    const double final_station = static_cast<double>(axis_.size() - 1);
    const auto near = static_cast<std::size_t>(
        std::clamp(right ? walls_.last - half_ : walls_.first + half_, 0.0, final_station));
    const double from = -std::min(wall(true, near), pixels_.half) + 1;
    const double to = std::min(wall(false, near), pixels_.half) - 1;
    const auto profiles = lengthwise(pixels_, from, to, right);
    const auto cover = lengthwise(cover_, from, to, right);
    auto looked = search();
    // Corners and round ends are short waves of the end's shape.
    looked.cutoff = std::max(half_ / 2, 4.0) / pixels_.step;
    looked.inside_depth = std::max(6.0, 1.5 * half_);
    looked.reach = std::clamp(half_ / 2, 5.0, 20.0);
    const double inner =
        right ? static_cast<double>(near) : final_station - static_cast<double>(near);
    for (int row = 0; row < cover.values.rows; ++row)
      looked.expected.push_back(run(cover, row, inner).second);
    const auto border = find_border(profiles, looked);
    Cap cap;
    const std::string name = right ? "right" : "left";
    cap.kind = border.out_of_view_share > open_share || border.found_share == 0 ? Boundary::open
                                                                                : Boundary::closed;
    const double mixed = std::min(border.out_of_view_share, 1 - border.out_of_view_share);
    if (mixed > doubtful_share)
      shape.doubts.push_back("Part of the " + name + " end runs out of the image.");
    else if (cap.kind == Boundary::closed && border.found_share < least_found_share)
      shape.doubts.push_back("The " + name + " end does not show clearly.");
    const auto station = [&](double at) { return right ? at : final_station - at; };
    if (cap.kind == Boundary::open) {
      cap.station = station(final_station);
      return cap;
    }
    const double origin = pixels_.across(pixels_.column(from));
    for (std::size_t row = 0; row < border.position.size(); ++row)
      cap.curve.push_back(
          {station(border.position[row]), origin + static_cast<double>(row) * pixels_.step});
    const auto middle = static_cast<std::size_t>(std::clamp(
        std::lround(-origin / pixels_.step), 0L, static_cast<long>(cap.curve.size()) - 1));
    cap.station = cap.curve[middle].x;
    return cap;
  }

  void draw(const Cap& left, const Cap& right, TubeShape& shape) const {
    shape.left_end = left.kind;
    shape.right_end = right.kind;
    Polygon outline;
    const double upper_from = left.curve.empty() ? left.station : left.curve.front().x;
    const double upper_to = right.curve.empty() ? right.station : right.curve.front().x;
    const double lower_from = left.curve.empty() ? left.station : left.curve.back().x;
    const double lower_to = right.curve.empty() ? right.station : right.curve.back().x;
    for (std::size_t i = 0; i < axis_.size(); ++i) {
      const double at = static_cast<double>(i);
      if (at >= upper_from && at <= upper_to) outline.push_back(axis_.place(at, -wall(true, i)));
    }
    for (const auto& one : right.curve) outline.push_back(axis_.place(one.x, one.y));
    for (std::size_t i = axis_.size(); i-- > 0;) {
      const double at = static_cast<double>(i);
      if (at >= lower_from && at <= lower_to) outline.push_back(axis_.place(at, wall(false, i)));
    }
    for (auto one = left.curve.rbegin(); one != left.curve.rend(); ++one)
      outline.push_back(axis_.place(one->x, one->y));
    shape.outline = clipped(outline, image_.cols, image_.rows);
    draw_axis(left, right, shape);
  }

  /// The axis between the ends, or up to where it leaves the image.
  void draw_axis(const Cap& left, const Cap& right, TubeShape& shape) const {
    Polygon line;
    const auto seen = [&](const Point& p) {
      return p.x >= -0.5 && p.y >= -0.5 && p.x <= image_.cols - 0.5 && p.y <= image_.rows - 0.5;
    };
    constexpr double fine = 0.1;
    const bool both = in_view(walls_.upper) && in_view(walls_.lower);
    for (double at = left.station; at < right.station; at += fine) {
      const auto i = std::min(static_cast<std::size_t>(std::max(at, 0.0)), axis_.size() - 1);
      const double middle = both ? (walls_.lower.position[i] - walls_.upper.position[i]) / 2 : 0;
      const auto point = axis_.place(at, middle);
      if (seen(point)) line.push_back(point);
    }
    if (line.size() < 2) line = {axis_.points.front(), axis_.points.back()};
    shape.axis = simplified(line, 0.15);
  }

  cv::Mat image_, mask_;
  ShapeRequest request_;
  Axis axis_;
  double half_ = 0;
  double pad_ = 0;
  Straightened pixels_, cover_;
  Walls walls_;
};

}  // namespace

TubeShape measure_tube(const cv::Mat& image, const cv::Mat& region, const ShapeRequest& request) {
  return TubeMeasure(image, region, request).measure();
}

Polygon clipped(const Polygon& polygon, int width, int height) {
  Polygon kept = polygon;
  const auto cut = [&kept](auto depth) {
    Polygon next;
    for (std::size_t i = 0; i < kept.size(); ++i) {
      const Point& a = kept[i];
      const Point& b = kept[(i + 1) % kept.size()];
      const double from = depth(a);
      const double to = depth(b);
      if (from >= 0) next.push_back(a);
      if ((from >= 0) == (to >= 0)) continue;
      const double part = from / (from - to);
      next.push_back({a.x + part * (b.x - a.x), a.y + part * (b.y - a.y)});
    }
    kept = std::move(next);
  };
  cut([](const Point& p) { return p.x + 0.5; });
  cut([](const Point& p) { return p.y + 0.5; });
  cut([width](const Point& p) { return width - 0.5 - p.x; });
  cut([height](const Point& p) { return height - 0.5 - p.y; });
  return kept;
}

}  // namespace wavefount::tube
