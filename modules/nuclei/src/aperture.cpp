#include "wavefount/nuclei/aperture.h"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "wavefount/nuclei/local_level.h"

namespace wavefount::nuclei {
namespace {

constexpr double ring_from = 1.5;
constexpr double ring_to = 2.5;
/// Even around a tiny disc the ring keeps clear of its blur and is wide enough to be a level.
constexpr double ring_gap_px = 1.5;
constexpr double ring_width_px = 2.5;
constexpr int fewest_ring_pixels = 16;
/// With less of the disc than this in the tube its mean is another place's.
constexpr double least_covered = 0.4;
constexpr double keep_clear = 1.3;

double squared(double value) {
  return value * value;
}

double distance_squared(const Disc& disc, double x, double y) {
  return squared(x - disc.x) + squared(y - disc.y);
}

struct Box {
  int x0, x1, y0, y1;  ///< inclusive
};

Box box_around(const Disc& disc, double reach, const cv::Size& size) {
  return {std::max(0, static_cast<int>(std::ceil(disc.x - reach))),
          std::min(size.width - 1, static_cast<int>(std::floor(disc.x + reach))),
          std::max(0, static_cast<int>(std::ceil(disc.y - reach))),
          std::min(size.height - 1, static_cast<int>(std::floor(disc.y + reach)))};
}

struct Weighted {
  double mean = 0;
  double weight = 0;
  double weight_squared = 0;
};

/// Mean over the disc with covered shares as weights: a pixel counts by how far the disc's rim,
/// taken as straight within the pixel, covers it.
Weighted disc_mean(const cv::Mat1f& frame, const cv::Mat1b& tubes, const Disc& disc,
                   const std::vector<Disc>& others) {
  Weighted sum;
  const Box box = box_around(disc, disc.radius + 1, frame.size());
  for (int y = box.y0; y <= box.y1; ++y) {
    for (int x = box.x0; x <= box.x1; ++x) {
      if (tubes(y, x) == 0) continue;
      const double apart = distance_squared(disc, x, y);
      const double weight = std::clamp(disc.radius + 0.5 - std::sqrt(apart), 0.0, 1.0);
      if (weight <= 0) continue;
      const double share = apart / squared(disc.radius);
      if (std::any_of(others.begin(), others.end(), [&](const Disc& other) {
            return distance_squared(other, x, y) < std::min(share, 1.0) * squared(other.radius);
          }))
        continue;
      sum.mean += weight * static_cast<double>(frame(y, x));
      sum.weight += weight;
      sum.weight_squared += weight * weight;
    }
  }
  if (sum.weight > 0) sum.mean /= sum.weight;
  return sum;
}

LocalLevel ring_mean(const cv::Mat1f& frame, const cv::Mat1b& tubes, const Disc& disc,
                     const std::vector<Disc>& others) {
  const auto [inner, first_outer] = ring_around(disc.radius);
  const double step = first_outer - inner;
  std::vector<float> values;
  for (double outer = inner + step; outer < inner + 3.5 * step; outer += step) {
    values.clear();
    const Box box = box_around(disc, outer, frame.size());
    for (int y = box.y0; y <= box.y1; ++y) {
      for (int x = box.x0; x <= box.x1; ++x) {
        if (tubes(y, x) == 0) continue;
        const double apart = distance_squared(disc, x, y);
        if (apart < inner * inner || apart > outer * outer) continue;
        if (std::any_of(others.begin(), others.end(), [&](const Disc& other) {
              return distance_squared(other, x, y) < squared(keep_clear * other.radius + 1);
            }))
          continue;
        values.push_back(frame(y, x));
      }
    }
    if (static_cast<int>(values.size()) >= fewest_ring_pixels) return clipped_mean(values);
  }
  return {};
}

}  // namespace

Ring ring_around(double radius_px) {
  Ring ring;
  ring.inner_px = std::max(ring_from * radius_px, radius_px + ring_gap_px);
  ring.outer_px = ring.inner_px + std::max((ring_to - ring_from) * radius_px, ring_width_px);
  return ring;
}

ApertureReading read_aperture(const cv::Mat1f& frame, const cv::Mat1b& tubes, const Disc& disc,
                              const std::vector<Disc>& others, const CameraModel& camera,
                              int binned_pixels) {
  ApertureReading reading;
  const Weighted inside = disc_mean(frame, tubes, disc, others);
  if (inside.weight < least_covered * std::numbers::pi * squared(disc.radius)) return reading;
  const LocalLevel ring = ring_mean(frame, tubes, disc, others);
  if (ring.count == 0) return reading;
  reading.valid = true;
  reading.surroundings = ring.mean;
  reading.signal = inside.mean - ring.mean;
  reading.variance =
      (camera.variance(inside.mean) * inside.weight_squared / squared(inside.weight) +
       camera.variance(ring.mean) / ring.count) /
      binned_pixels;
  return reading;
}

}  // namespace wavefount::nuclei
