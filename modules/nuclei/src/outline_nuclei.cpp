#include "wavefount/nuclei/outline_nuclei.h"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <opencv2/imgproc.hpp>

#include "wavefount/nuclei/disc_edge.h"
#include "wavefount/nuclei/local_level.h"
#include "wavefount/nuclei/region_growing.h"
#include "wavefount/nuclei/region_shape.h"

namespace wavefount::nuclei {
namespace {

/// Smoothing in pixels for noise as strong as the nucleus, so that what is left of the noise is a
/// tenth of the nucleus.
constexpr double smoothing_a_noise = 2.8;
/// More smoothing than this share of the radius would move the outline.
constexpr double most_smoothing = 0.3;
/// A ring wants this many pixels to be a level.
constexpr int fewest_ring_pixels = 24;
/// Ring pixels that are enough for the level of an outline, and for that of a brightness.
constexpr double outline_ring_pixels = 300;
constexpr double brightness_ring_pixels = 1500;
/// A candidate whose outline has its place and radius to this share needs no second round.
constexpr double settled_share = 0.1;
/// An outline with deeper dents than this is a network, not a nucleus.
constexpr double least_solid = 0.7;
/// A wide nucleus falls more steeply than this even out of focus (a ball has 0.27); a Gaussian
/// cloud has 0.575, slow unevenness of the cytoplasm 0.4 to 0.5.
constexpr double softest_edge = 0.37;
/// A central difference over two pixels, taken up to half a pixel off the contour, adds this much
/// to the squared blur that the slope tells.
constexpr double sampling_blur_px2 = 1.0 / 3 + 1.0 / 12;

double squared(double value) {
  return value * value;
}

/// A nucleus while it is being outlined, in pixels of the frame.
struct Body {
  double x = 0, y = 0, radius = 0;
  double soft = 2;  ///< how far its light reaches beyond its radius, pixels
  std::size_t candidate = 0;
  int tube = 0;
};

bool reaches(const Body& body, double x, double y, double share) {
  return squared(x - body.x) + squared(y - body.y) < squared(share * body.radius + body.soft);
}

/// Whether another body lies nearer for its size.
bool belongs_elsewhere(const std::vector<Body>& others, const Body& own, double x, double y) {
  const double apart = (squared(x - own.x) + squared(y - own.y)) / squared(own.radius);
  return std::any_of(others.begin(), others.end(), [&](const Body& other) {
    return squared(x - other.x) + squared(y - other.y) < apart * squared(other.radius);
  });
}

/// Pixels of an image within `reach` of a place, in a box held to the image.
struct Box {
  Box(const Image& image, const Body& body, double reach)
      : x0(std::max(0, static_cast<int>(std::ceil(body.x - reach)))),
        x1(std::min(image_width(image) - 1, static_cast<int>(std::floor(body.x + reach)))),
        y0(std::max(0, static_cast<int>(std::ceil(body.y - reach)))),
        y1(std::min(image_height(image) - 1, static_cast<int>(std::floor(body.y + reach)))) {}
  int x0, x1, y0, y1;  ///< inclusive
};

std::vector<Body> within(const std::vector<Body>& others, const Body& body, double reach) {
  std::vector<Body> near;
  for (const Body& other : others)
    if (squared(other.x - body.x) + squared(other.y - body.y) <
        squared(reach + 1.2 * other.radius + other.soft))
      near.push_back(other);
  return near;
}

/// Level of the ring around a body, without other bodies, walls and outside; widened where little
/// of it is free. No more than about `most_values` of its pixels are read.
LocalLevel ring_level(const Image& image, const TubeMask& tubes, const Body& body,
                      const std::vector<Body>& others, double most_values) {
  const double inner = std::max(1.4 * body.radius, body.radius + body.soft) + 1;
  const double step = std::max(0.6 * body.radius, 4.0);
  const float* pixels = image.GetBufferPointer();
  std::vector<float> values;
  for (double outer = inner + step; outer < inner + 4.5 * step; outer += step) {
    values.clear();
    const auto near = within(others, body, outer);
    const Box box(image, body, outer);
    const double area = std::numbers::pi * (squared(outer) - squared(inner));
    const int stride = std::max(1, static_cast<int>(std::sqrt(area / most_values)));
    for (int y = box.y0; y <= box.y1; y += stride) {
      const float* row = pixels + static_cast<std::ptrdiff_t>(y) * image_width(image);
      for (int x = box.x0; x <= box.x1; x += stride) {
        const double distance = squared(x - body.x) + squared(y - body.y);
        if (distance < inner * inner || distance > outer * outer) continue;
        if (tubes.tube_at(x, y) != body.tube) continue;
        if (std::none_of(near.begin(), near.end(),
                         [&](const Body& other) { return reaches(other, x, y, 1.2); }))
          values.push_back(row[x]);
      }
    }
    if (static_cast<int>(values.size()) >= fewest_ring_pixels) break;
  }
  return clipped_mean(values);
}

/// Outlines the bodies of one cluster in a window of their own.
class Cluster {
 public:
  Cluster(const FullFrame& frame, const std::vector<Sighting>& candidates,
          const OutlineLimits& limits, std::vector<Body> bodies, std::vector<Body> around)
      : frame_(frame),
        candidates_(candidates),
        limits_(limits),
        bodies_(std::move(bodies)),
        around_(std::move(around)) {}

  void outline(std::vector<Sighting>& sightings) {
    open_window();
    grow();
    const bool settled = adopt_regions();
    if (bodies_.empty()) return;
    if (!settled) grow();
    const auto boxes = boxes_of(labels_, bodies_.size());
    for (std::size_t i = 0; i < bodies_.size(); ++i) measure(i, boxes[i], sightings);
  }

 private:
  void open_window() {
    double x0 = image_width(frame_.pixels);
    double y0 = image_height(frame_.pixels);
    double x1 = 0;
    double y1 = 0;
    for (const Body& body : bodies_) {
      const double reach = 2 * body.radius + 3;
      x0 = std::min(x0, body.x - reach);
      x1 = std::max(x1, body.x + reach);
      y0 = std::min(y0, body.y - reach);
      y1 = std::max(y1, body.y + reach);
    }
    const cv::Rect whole(0, 0, image_width(frame_.pixels), image_height(frame_.pixels));
    window_ =
        cv::Rect(
            cv::Point(static_cast<int>(std::floor(x0)), static_cast<int>(std::floor(y0))),
            cv::Point(static_cast<int>(std::ceil(x1)) + 1, static_cast<int>(std::ceil(y1)) + 1)) &
        whole;
  }

  std::vector<Body> others_than(std::size_t index) const {
    std::vector<Body> others = around_;
    for (std::size_t i = 0; i < bodies_.size(); ++i)
      if (i != index) others.push_back(bodies_[i]);
    return others;
  }

  /// Smooths, sets each body's levels and grows the regions.
  void grow() {
    const cv::Mat1f sharp(as_matrix(frame_.sharpest));
    cytoplasm_.clear();
    for (std::size_t i = 0; i < bodies_.size(); ++i)
      cytoplasm_.push_back(
          ring_level(frame_.sharpest, frame_.tubes, bodies_[i], others_than(i), outline_ring_pixels)
              .mean);
    smoothing_ = wanted_smoothing(sharp);
    // A sub-window: the filter takes the pixels beyond it from the frame.
    cv::GaussianBlur(sharp(window_), smooth_, cv::Size(0, 0), smoothing_, smoothing_,
                     cv::BORDER_REFLECT_101);
    shut_tube();
    seeds_.clear();
    for (std::size_t i = 0; i < bodies_.size(); ++i) {
      const Body& body = bodies_[i];
      Seed seed{body.x - window_.x, body.y - window_.y, body.radius, 0, 0};
      seed.peak = std::max(inner_level(i) - cytoplasm_[i], 0.0);
      seed.half =
          seed.peak > 0 ? cytoplasm_[i] + seed.peak / 2 : std::numeric_limits<double>::infinity();
      seeds_.push_back(seed);
    }
    labels_ = grow_regions(smooth_, seeds_);
    if (seeds_.size() > 1) join_regions(labels_, smooth_, seeds_, limits_.largest_radius_px);
  }

  /// Nothing grows out of the tube.
  void shut_tube() {
    const auto level = static_cast<float>(cytoplasm_.front());
    for (int y = 0; y < smooth_.rows; ++y)
      for (int x = 0; x < smooth_.cols; ++x)
        if (frame_.tubes.tube_at(x + window_.x, y + window_.y) < 0)
          smooth_(y, x) = std::min(smooth_(y, x), level);
  }

  double wanted_smoothing(const cv::Mat1f& sharp) const {
    double wanted = 0.5;
    double allowed = std::numeric_limits<double>::infinity();
    for (std::size_t i = 0; i < bodies_.size(); ++i) {
      const Body& body = bodies_[i];
      double sum = 0;
      int count = 0;
      for_core(body, [&](int x, int y) {
        sum += static_cast<double>(sharp(y, x));
        ++count;
      });
      const double level = count > 0 ? sum / count : cytoplasm_[i];
      const double noise = std::sqrt(frame_.camera.variance(level));
      allowed = std::min(allowed, most_smoothing * body.radius);
      if (level > cytoplasm_[i])
        wanted = std::max(wanted, smoothing_a_noise * noise / (level - cytoplasm_[i]));
    }
    return std::max(0.4, std::min(wanted, allowed));
  }

  /// Pixels of the frame within half a radius of the body's centre.
  template <class Visit>
  void for_core(const Body& body, Visit visit) const {
    const double reach = std::max(0.5 * body.radius, 1.0);
    const int x0 = std::max(window_.x, static_cast<int>(std::ceil(body.x - reach)));
    const int x1 = std::min(window_.x + window_.width - 1, static_cast<int>(body.x + reach));
    const int y0 = std::max(window_.y, static_cast<int>(std::ceil(body.y - reach)));
    const int y1 = std::min(window_.y + window_.height - 1, static_cast<int>(body.y + reach));
    for (int y = y0; y <= y1; ++y)
      for (int x = x0; x <= x1; ++x)
        if (squared(x - body.x) + squared(y - body.y) <= reach * reach) visit(x, y);
  }

  /// Median over the inner half, which a dark or bright spot inside does not move.
  double inner_level(std::size_t index) const {
    std::vector<float> values;
    for_core(bodies_[index],
             [&](int x, int y) { values.push_back(smooth_(y - window_.y, x - window_.x)); });
    if (values.empty()) return cytoplasm_[index];
    const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
    std::nth_element(values.begin(), middle, values.end());
    return static_cast<double>(*middle);
  }

  /// The first round's regions become the bodies of the second. True when a second would change
  /// nothing: one body, which lies where it was thought to.
  bool adopt_regions() {
    bool settled = bodies_.size() == 1;
    const auto boxes = boxes_of(labels_, bodies_.size());
    std::vector<Body> adopted;
    for (std::size_t i = 0; i < bodies_.size(); ++i) {
      const RegionShape shape =
          shape_of(labels_, static_cast<int>(i), boxes[i], smooth_, seeds_[i].half);
      if (shape.pixels == 0) continue;
      Body body = bodies_[i];
      body.x = window_.x + shape.x;
      body.y = window_.y + shape.y;
      body.radius = std::sqrt(std::max(shape.area, 1.0) / std::numbers::pi);
      body.soft =
          std::clamp(2.5 * edge_blur(shape, seeds_[i].peak), 2.0, std::max(2.0, body.radius));
      settled =
          settled && std::abs(body.radius / bodies_[i].radius - 1) < settled_share &&
          std::hypot(body.x - bodies_[i].x, body.y - bodies_[i].y) < settled_share * body.radius;
      adopted.push_back(body);
    }
    bodies_ = std::move(adopted);
    return settled;
  }

  /// Blur as the slope across the contour tells, pixels.
  static double edge_blur(const RegionShape& shape, double peak) {
    if (shape.slope <= 0) return 0;
    const double told = peak / (std::sqrt(2 * std::numbers::pi) * shape.slope);
    return std::sqrt(std::max(told * told - sampling_blur_px2, 0.04));
  }

  void measure(std::size_t index, const cv::Rect& box, std::vector<Sighting>& sightings) const {
    const Seed& seed = seeds_[index];
    const RegionShape shape = shape_of(labels_, static_cast<int>(index), box, smooth_, seed.half);
    if (shape.pixels == 0 || shape.slope <= 0) return;
    if (shape.slenderness > limits_.slenderest || leaks(shape, seed)) return;
    if (solidity(shape.runs) < least_solid) return;
    const double half_radius = std::sqrt(shape.area / std::numbers::pi);
    const double blur = edge_blur(shape, seed.peak);
    const double edge = blur / half_radius;
    if (half_radius > limits_.cloud_radius_px && soft(index, box, half_radius)) return;
    const double radius = half_radius / disc_with_edge(edge).half_radius;
    if (radius < limits_.smallest_radius_px || radius > limits_.largest_radius_px) return;
    Sighting sighting = candidates_[bodies_[index].candidate];
    sighting.x_px = window_.x + shape.x;
    sighting.y_px = window_.y + shape.y;
    sighting.radius_px = radius;
    sighting.area_px = std::numbers::pi * radius * radius;
    sighting.split = shape.split;
    place_runs(shape, sighting);
    const double own_blur = std::sqrt(std::max(blur * blur - smoothing_ * smoothing_, 0.0));
    measure_light(index, disc_edge(own_blur / radius).mean_inside, sighting);
    if (sighting.brightness <= limits_.significance * std::sqrt(sighting.brightness_variance))
      return;
    sightings.push_back(std::move(sighting));
  }

  /// Whether a wide outline is that of a cloud.
  bool soft(std::size_t index, const cv::Rect& box, double half_radius) const {
    const double slope = wide_slope(labels_, static_cast<int>(index), box, smooth_, half_radius);
    return seeds_[index].peak >
           softest_edge * std::sqrt(2 * std::numbers::pi) * slope * half_radius;
  }

  /// A half level that lies below the cytoplasm somewhere lets the region run to its reach.
  static bool leaks(const RegionShape& shape, const Seed& seed) {
    int far = 0;
    for (const Run& run : shape.runs)
      for (int x = run.x0; x < run.x1; ++x)
        if (squared(x - seed.x) + squared(run.y - seed.y) > squared(1.9 * seed.radius + 1)) ++far;
    return far > 0.05 * shape.pixels;
  }

  void place_runs(const RegionShape& shape, Sighting& sighting) const {
    const int right = image_width(frame_.pixels);
    const int bottom = image_height(frame_.pixels);
    sighting.runs.clear();
    sighting.touches_border = false;
    for (const Run& run : shape.runs) {
      const Run placed{static_cast<std::uint16_t>(run.y + window_.y),
                       static_cast<std::uint16_t>(run.x0 + window_.x),
                       static_cast<std::uint16_t>(run.x1 + window_.x)};
      if (placed.x0 == 0 || placed.y == 0 || placed.x1 >= right || placed.y + 1 >= bottom)
        sighting.touches_border = true;
      sighting.runs.push_back(placed);
    }
  }

  /// `dimming`: mean over the outline of a disc of height 1 under the same blur.
  void measure_light(std::size_t index, double dimming, Sighting& sighting) const {
    const Image& image = frame_.pixels;
    const auto others = others_than(index);
    Body body = bodies_[index];
    body.x = sighting.x_px;
    body.y = sighting.y_px;
    body.radius = sighting.radius_px;
    const LocalLevel ring = ring_level(image, frame_.tubes, body, others, brightness_ring_pixels);
    const float* pixels = image.GetBufferPointer();
    const int width = image_width(image);
    double sum = 0;
    int count = 0;
    int full = 0;
    for (const Run& run : sighting.runs) {
      for (int x = run.x0; x < run.x1; ++x) {
        const auto value =
            static_cast<double>(pixels[static_cast<std::ptrdiff_t>(run.y) * width + x]);
        sum += value;
        ++count;
        if (value >= frame_.camera.saturation_counts) ++full;
      }
    }
    const double mean = sum / count;
    sighting.cytoplasm = ring.count > 0 ? ring.mean : cytoplasm_[index];
    sighting.brightness = (mean - sighting.cytoplasm) / dimming;
    sighting.brightness_variance =
        (frame_.camera.variance(mean) / count +
         frame_.camera.variance(sighting.cytoplasm) / std::max(ring.count, 1)) /
        (dimming * dimming);
    // A hot pixel alone does not make a nucleus saturated.
    sighting.saturated = full > std::max(1, count / 100);
    sighting.integrated = light_within(2 * body.radius, body, others, sighting.cytoplasm);
  }

  double light_within(double reach, const Body& body, const std::vector<Body>& others,
                      double cytoplasm) const {
    const float* pixels = frame_.pixels.GetBufferPointer();
    const int width = image_width(frame_.pixels);
    const auto near = within(others, body, reach);
    const Box box(frame_.pixels, body, reach);
    double light = 0;
    for (int y = box.y0; y <= box.y1; ++y) {
      const float* row = pixels + static_cast<std::ptrdiff_t>(y) * width;
      for (int x = box.x0; x <= box.x1; ++x) {
        if (squared(x - body.x) + squared(y - body.y) > reach * reach) continue;
        if (frame_.tubes.tube_at(x, y) != body.tube) continue;
        if (belongs_elsewhere(near, body, x, y)) continue;
        light += static_cast<double>(row[x]) - cytoplasm;
      }
    }
    return light;
  }

  const FullFrame& frame_;
  const std::vector<Sighting>& candidates_;
  const OutlineLimits& limits_;
  std::vector<Body> bodies_;
  std::vector<Body> around_;
  cv::Rect window_;
  cv::Mat1f smooth_;
  double smoothing_ = 0;
  std::vector<double> cytoplasm_;
  std::vector<Seed> seeds_;
  cv::Mat1i labels_;
};

/// Bodies whose outlines may touch, each cluster in the order of its first member.
std::vector<std::vector<std::size_t>> clusters_of(const std::vector<Body>& bodies) {
  std::vector<std::size_t> root(bodies.size());
  for (std::size_t i = 0; i < root.size(); ++i) root[i] = i;
  const auto find = [&](std::size_t i) {
    while (root[i] != i) i = root[i] = root[root[i]];
    return i;
  };
  for (std::size_t i = 0; i < bodies.size(); ++i) {
    for (std::size_t j = 0; j < i; ++j) {
      const double reach = 1.2 * (bodies[i].radius + bodies[j].radius) + 2;
      if (squared(bodies[i].x - bodies[j].x) + squared(bodies[i].y - bodies[j].y) > reach * reach)
        continue;
      const std::size_t a = find(i);
      const std::size_t b = find(j);
      root[std::max(a, b)] = std::min(a, b);
    }
  }
  std::vector<std::vector<std::size_t>> members(bodies.size());
  for (std::size_t i = 0; i < bodies.size(); ++i) members[find(i)].push_back(i);
  std::erase_if(members, [](const auto& cluster) { return cluster.empty(); });
  return members;
}

bool within_sight(const Body& body, const std::vector<Body>& members) {
  return std::any_of(members.begin(), members.end(), [&](const Body& member) {
    const double reach = 5 * member.radius + 20 + 2 * body.radius;
    return squared(body.x - member.x) + squared(body.y - member.y) < reach * reach;
  });
}

}  // namespace

std::vector<Sighting> outline_nuclei(const FullFrame& frame,
                                     const std::vector<Sighting>& candidates,
                                     const OutlineLimits& limits) {
  std::vector<Body> bodies;
  for (std::size_t i = 0; i < candidates.size(); ++i) {
    const Sighting& seen = candidates[i];
    bodies.push_back({seen.x_px, seen.y_px, std::max(seen.radius_px, 1.0), 2, i, seen.tube});
  }
  std::vector<Sighting> sightings;
  for (const auto& members : clusters_of(bodies)) {
    std::vector<Body> own;
    std::vector<char> inside(bodies.size(), 0);
    for (const std::size_t member : members) {
      own.push_back(bodies[member]);
      inside[member] = 1;
    }
    std::vector<Body> around;
    for (std::size_t i = 0; i < bodies.size(); ++i)
      if (inside[i] == 0 && within_sight(bodies[i], own)) around.push_back(bodies[i]);
    Cluster(frame, candidates, limits, std::move(own), std::move(around)).outline(sightings);
  }
  std::stable_sort(sightings.begin(), sightings.end(), [](const Sighting& a, const Sighting& b) {
    return a.y_px != b.y_px ? a.y_px < b.y_px : a.x_px < b.x_px;
  });
  return sightings;
}

}  // namespace wavefount::nuclei
