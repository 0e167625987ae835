#include "still_layers.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <opencv2/imgproc.hpp>

#include "wavefount/synthetic/counter_random.h"

namespace wavefount {
namespace {

int margin_of(const Scene& scene) {
  double largest = 0;
  for (const auto& drift : scene.nuisances.drift_um)
    largest = std::max({largest, std::abs(drift.x), std::abs(drift.y)});
  return static_cast<int>(std::ceil(largest / scene.pixel_um)) + 2;
}

/// Smooth unevenness of the cytoplasm: a few plane waves of 60 to 400 µm.
class Mottle {
  static constexpr int wave_count = 8;

 public:
  Mottle(double amplitude, std::uint64_t seed) {
    RandomSequence random(seed, 77);
    for (auto& wave : waves_) {
      const double turn = random.uniform(0, 2 * M_PI);
      const double length_um = random.uniform(60, 400);
      wave = {2 * M_PI / length_um * std::cos(turn), 2 * M_PI / length_um * std::sin(turn),
              random.uniform(0, 2 * M_PI), amplitude * std::sqrt(2.0 / wave_count)};
    }
  }
  double at(Point p) const {
    double sum = 1;
    for (const auto& wave : waves_)
      sum += wave.height * std::cos(wave.x * p.x + wave.y * p.y + wave.phase);
    return sum;
  }

 private:
  struct Wave {
    double x = 0, y = 0, phase = 0, height = 0;
  };
  std::array<Wave, wave_count> waves_;
};

/// Depth of cytoplasm seen through the tube, 1 on the axis.
double depth(const Tube& tube, double across_um, double roundness) {
  const double share = std::min(1.0, std::abs(across_um) / (tube.width_um / 2));
  return 1 - roundness + roundness * std::sqrt(1 - share * share);
}

struct Pixel {
  double light = 0;
  double inside = 0;
  int tube = 0;
};

Pixel still_pixel(const Scene& scene, const Mottle& mottle, Point place) {
  Pixel pixel;
  pixel.light = scene.optics.surround;
  double nearest = 1e9;
  for (std::size_t i = 0; i < scene.tubes.size(); ++i) {
    const auto& tube = scene.tubes[i];
    const double edge = tube.edge_distance_um(place);
    if (-edge < nearest) {
      nearest = -edge;
      pixel.tube = static_cast<int>(i);
    }
    if (edge < -8 * scene.nuisances.wall_glow_um - 4) continue;
    const double share = std::clamp(edge / scene.pixel_um + 0.5, 0.0, 1.0);
    const double across = tube.place(place).across_um;
    const double cytoplasm = (scene.optics.cytoplasm - scene.optics.surround) *
                             depth(tube, across, scene.optics.roundness) * mottle.at(place);
    const double off = edge / scene.nuisances.wall_glow_um;
    pixel.inside = std::max(pixel.inside, share);
    pixel.light += share * cytoplasm + scene.nuisances.wall_glow * std::exp(-off * off / 2);
  }
  return pixel;
}

void add_spot(cv::Mat& canvas, const Spot& spot, Point origin_um, double pixel_um) {
  const double reach = 4 * spot.radius_um;
  for (int y = 0; y < canvas.rows; ++y) {
    const double dy = origin_um.y + y * pixel_um - spot.place_um.y;
    if (std::abs(dy) > reach) continue;
    for (int x = 0; x < canvas.cols; ++x) {
      const double dx = origin_um.x + x * pixel_um - spot.place_um.x;
      const double off = std::hypot(dx, dy) / spot.radius_um;
      if (off < 4)
        canvas.at<float>(y, x) += static_cast<float>(spot.brightness * std::exp(-off * off / 2));
    }
  }
}

/// A bubble keeps the cytoplasm out and has a bright rim.
void add_bubble(StillLayers& layers, const Spot& bubble, const Scene& scene) {
  constexpr double rim_um = 3;
  for (int y = 0; y < layers.content.rows; ++y)
    for (int x = 0; x < layers.content.cols; ++x) {
      const double px = (x - layers.margin_px) * scene.pixel_um - bubble.place_um.x;
      const double py = (y - layers.margin_px) * scene.pixel_um - bubble.place_um.y;
      const double out = std::hypot(px, py) - bubble.radius_um;
      if (out > 4 * rim_um) continue;
      const double share = std::clamp(0.5 - out / scene.pixel_um, 0.0, 1.0);
      auto& light = layers.content.at<float>(y, x);
      const double shown = light + share * (scene.optics.surround - light) +
                           bubble.brightness * std::exp(-out * out / (2 * rim_um * rim_um));
      light = static_cast<float>(shown);
      layers.inside.at<float>(y, x) *= static_cast<float>(1 - share);
    }
}

}  // namespace

StillLayers::StillLayers(const Scene& scene) : margin_px(margin_of(scene)) {
  const cv::Size canvas(scene.width + 2 * margin_px, scene.height + 2 * margin_px);
  content.create(canvas, CV_32F);
  inside.create(canvas, CV_32F);
  tube_of.create(canvas, CV_8U);
  const Mottle mottle(scene.optics.mottle, scene.seed);
  for (int y = 0; y < canvas.height; ++y)
    for (int x = 0; x < canvas.width; ++x) {
      const Point place{(x - margin_px) * scene.pixel_um, (y - margin_px) * scene.pixel_um};
      const auto pixel = still_pixel(scene, mottle, place);
      content.at<float>(y, x) = static_cast<float>(pixel.light);
      inside.at<float>(y, x) = static_cast<float>(pixel.inside);
      tube_of.at<std::uint8_t>(y, x) = static_cast<std::uint8_t>(pixel.tube);
    }
  for (const auto& bubble : scene.nuisances.bubbles) add_bubble(*this, bubble, scene);
  const Point origin{-margin_px * scene.pixel_um, -margin_px * scene.pixel_um};
  for (const auto& spot : scene.nuisances.debris) add_spot(content, spot, origin, scene.pixel_um);
  cv::GaussianBlur(content, content, {}, scene.optics.psf_um / scene.pixel_um);
  evenness.create(cv::Size(scene.width, scene.height), CV_32F);
  for (int y = 0; y < scene.height; ++y)
    for (int x = 0; x < scene.width; ++x)
      evenness.at<float>(y, x) =
          static_cast<float>(scene.evenness({x * scene.pixel_um, y * scene.pixel_um}));
}

}  // namespace wavefount
