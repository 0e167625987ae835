#include "wavefount/tube/find_tubes.h"

#include <algorithm>
#include <cmath>
#include <opencv2/core.hpp>
#include <opencv2/imgproc.hpp>
#include <utility>

#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"
#include "wavefount/tube/binning.h"
#include "wavefount/tube/polygon_mask.h"
#include "wavefount/tube/segment.h"
#include "wavefount/tube/tube_shape.h"

namespace wavefount::tube {
namespace {

/// Inside over outside, in units of the noise of a smoothed pixel, below which outlines are
/// doubted.
constexpr double doubted_contrast_to_noise = 6;
/// A tube beside brighter ones shows at least this share of their contrast.
constexpr double dimmest_share = 0.15;
/// Searches for dimmer tubes beside those found.
constexpr int searches = 3;

/// Reduced pixels to µm and back.
struct Scale {
  int factor = 1;
  double pixel_um = 1;

  double um(double reduced_px) const { return to_full_px(reduced_px, factor) * pixel_um; }
  double px(double um_value) const { return to_reduced_px(um_value / pixel_um, factor); }
  double length_um(double reduced_px) const { return reduced_px * factor * pixel_um; }
  double length_px(double um_value) const { return um_value / (factor * pixel_um); }
  Polygon um(const Polygon& polygon) const {
    Polygon out;
    for (const auto& one : polygon) out.push_back({um(one.x), um(one.y)});
    return out;
  }
  Polygon px(const Polygon& polygon) const {
    Polygon out;
    for (const auto& one : polygon) out.push_back({px(one.x), px(one.y)});
    return out;
  }
};

struct Found {
  cv::Mat region;
  TubeShape shape;
  std::vector<Polygon> bubbles;
};

cv::Mat field_image(const LevelField& field, cv::Size size) {
  cv::Mat image(size, CV_32FC1);
  for (int y = 0; y < size.height; ++y)
    for (int x = 0; x < size.width; ++x) image.at<float>(y, x) = static_cast<float>(field.at(x, y));
  return image;
}

class TubeFinder {
 public:
  TubeFinder(const FilmDescription& film, const Prescan& prescan, const TubeSettings& settings)
      : film_(film), settings_(settings), scale_{prescan.factor, film.pixel_um} {
    // The quantile shows cytoplasm without nuclei, the median has less noise; where nuclei are few
    // the two agree, and where they are many only the first shows an even inside.
    image_ = as_matrix(*prescan.low).clone();
    if (film.overrides.tube_width_um)
      request_.width = scale_.length_px(*film.overrides.tube_width_um);
    request_.thin = std::max(3.0, scale_.length_px(settings.wall_glow_um));
  }

  Tubes find() {
    if (!film_.overrides.outline_um.empty())
      from_outline();
    else if (settings_.automatic)
      search();
    Tubes tubes;
    order();
    for (const auto& one : found_) tubes.tubes.push_back(as_tube(one));
    if (tubes.tubes.empty()) tubes.tubes.push_back(whole_field());
    for (std::size_t i = 0; i < tubes.tubes.size(); ++i) {
      tubes.tubes[i].index = static_cast<int>(i);
      override_tube(tubes.tubes[i]);
    }
    return tubes;
  }

 private:
  void search() {
    cv::Mat rest = image_.clone();
    const double narrowest = scale_.length_px(settings_.narrowest_um);
    double brightest = 0;
    for (int round = 0; round < searches; ++round) {
      const auto segmentation = segment(rest, request_.thin, narrowest * narrowest);
      if (segmentation.regions.empty()) return;
      if (segmentation.contrast < dimmest_share * brightest) return;
      brightest = std::max(brightest, segmentation.contrast);
      const auto outside = field_image(segmentation.outside, rest.size());
      const auto inside = field_image(segmentation.inside, rest.size());
      for (const auto& region : segmentation.regions) {
        measure(region, segmentation, inside, outside);
        blank_out(region, outside, rest);
      }
    }
  }

  void measure(const cv::Mat& region, const Segmentation& segmentation, const cv::Mat& inside,
               const cv::Mat& outside) {
    auto request = request_;
    std::vector<double> levels;
    for (int y = 0; y < region.rows; y += 4)
      for (int x = 0; x < region.cols; x += 4)
        if (!region.at<unsigned char>(y, x)) levels.push_back(image_.at<float>(y, x));
    request.outside_level = median(std::move(levels));
    Found one;
    one.region = region;
    one.shape = looks_like_embryo(region) ? measure_embryo(image_, region, request)
                                          : measure_tube(image_, region, request);
    if (one.shape.outline.size() < 3 || one.shape.axis.size() < 2) return;
    if (one.shape.width < scale_.length_px(settings_.narrowest_um)) return;
    if (segmentation.contrast < doubted_contrast_to_noise * segmentation.noise)
      one.shape.doubts.push_back("The tube hardly stands out from what is around it.");
    one.bubbles = find_bubbles(image_, inside, outside, one.shape.outline,
                               scale_.length_px(settings_.smallest_bubble_um));
    found_.push_back(std::move(one));
  }

  /// Takes a found tube, and the light around it, out of the image for the next search.
  void blank_out(const cv::Mat& region, const cv::Mat& outside, cv::Mat& rest) const {
    const int side = 2 * static_cast<int>(std::lround(2 * request_.thin)) + 1;
    cv::Mat wider;
    cv::dilate(region, wider, cv::getStructuringElement(cv::MORPH_ELLIPSE, cv::Size(side, side)));
    outside.copyTo(rest, wider);
  }

  void from_outline() {
    const auto given = scale_.px(film_.overrides.outline_um);
    Found one;
    one.region = polygon_mask(given, image_.size());
    const auto outline = clipped(given, image_.cols, image_.rows);
    if (outline.size() < 3 || cv::countNonZero(one.region) < 9) return;
    cv::Mat levels;
    one.region.convertTo(levels, CV_32F);
    one.shape = looks_like_embryo(one.region) ? measure_embryo(levels, one.region, request_)
                                              : measure_tube(levels, one.region, request_);
    one.shape.outline = outline;
    one.shape.doubts.clear();
    found_.push_back(std::move(one));
  }

  /// Top to bottom; where the largest tube stands upright, left to right.
  void order() {
    if (found_.empty()) return;
    const auto& axis = found_.front().shape.axis;
    const bool upright =
        std::abs(axis.back().y - axis.front().y) > std::abs(axis.back().x - axis.front().x);
    const auto place = [&](const Found& one) {
      const auto m = cv::moments(one.region, true);
      return upright ? m.m10 / m.m00 : m.m01 / m.m00;
    };
    std::stable_sort(found_.begin(), found_.end(),
                     [&](const Found& a, const Found& b) { return place(a) < place(b); });
  }

  Tube as_tube(const Found& one) const {
    Tube tube;
    tube.measured = true;
    tube.wide = one.shape.wide;
    tube.outline_um = scale_.um(simplified(one.shape.outline, 0.1));
    tube.axis_um = scale_.um(one.shape.axis);
    tube.width_um = scale_.length_um(one.shape.width);
    tube.left_end = one.shape.left_end;
    tube.right_end = one.shape.right_end;
    tube.upper_wall = one.shape.upper_wall;
    tube.lower_wall = one.shape.lower_wall;
    tube.doubts = one.shape.doubts;
    for (const auto& bubble : one.bubbles) tube.holes_um.push_back(scale_.um(bubble));
    return tube;
  }

  Tube whole_field() const {
    Tube tube;
    const double left = -0.5 * film_.pixel_um;
    const double right = (film_.width - 0.5) * film_.pixel_um;
    const double bottom = (film_.height - 0.5) * film_.pixel_um;
    tube.outline_um = {{left, left}, {right, left}, {right, bottom}, {left, bottom}};
    const double middle_x = (left + right) / 2;
    const double middle_y = (left + bottom) / 2;
    const bool upright = film_.height > film_.width;
    tube.axis_um = upright ? Polygon{{middle_x, left}, {middle_x, bottom}}
                           : Polygon{{left, middle_y}, {right, middle_y}};
    tube.width_um = std::min(right - left, bottom - left);
    tube.left_end = tube.right_end = Boundary::open;
    tube.upper_wall = tube.lower_wall = Boundary::open;
    return tube;
  }

  void override_tube(Tube& tube) const {
    const auto& given = film_.overrides;
    if (given.tube_width_um) tube.width_um = *given.tube_width_um;
    tube.left_end = given.left_end.value_or(tube.left_end);
    tube.right_end = given.right_end.value_or(tube.right_end);
    tube.upper_wall = given.upper_wall.value_or(tube.upper_wall);
    tube.lower_wall = given.lower_wall.value_or(tube.lower_wall);
    for (const auto& polygon : given.exclude_um)
      if (polygon.size() >= 3) tube.holes_um.push_back(polygon);
    tube.length_um = 0;
    for (std::size_t i = 1; i < tube.axis_um.size(); ++i)
      tube.length_um += std::hypot(tube.axis_um[i].x - tube.axis_um[i - 1].x,
                                   tube.axis_um[i].y - tube.axis_um[i - 1].y);
  }

  const FilmDescription& film_;
  const TubeSettings& settings_;
  Scale scale_;
  cv::Mat image_;
  ShapeRequest request_;
  std::vector<Found> found_;
};

std::string described(const Tube& tube) {
  const auto kind = [](Boundary one) { return one == Boundary::closed ? "closed" : "open"; };
  return std::string(tube.wide ? "An embryo-like outline, " : "A tube, ") +
         rounded_text(tube.width_um, 3) + " µm wide and " + rounded_text(tube.length_um, 4) +
         " µm long in view; left end " + kind(tube.left_end) + ", right end " +
         kind(tube.right_end) + ", upper wall " + kind(tube.upper_wall) + ", lower wall " +
         kind(tube.lower_wall) +
         (tube.holes_um.empty()
              ? std::string(".")
              : "; " + std::to_string(tube.holes_um.size()) + " bubble(s) or excluded region(s).");
}

}  // namespace

Tubes find_tubes(const FilmDescription& film, const Prescan& prescan, const TubeSettings& settings,
                 Messages& messages) {
  auto tubes = TubeFinder(film, prescan, settings).find();
  for (const auto& tube : tubes.tubes) {
    if (tube.measured)
      messages.note(described(tube));
    else if (settings.automatic)
      messages.note(
          "No outline of a tube shows; the whole field is measured, with open ends and walls. The "
          "sidecar can give outline, tube_width_um, left_end, right_end, upper_wall, lower_wall.");
    for (const auto& doubt : tube.doubts) messages.warn(doubt);
  }
  return tubes;
}

}  // namespace wavefount::tube
