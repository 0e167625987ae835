#include "tube_scene.h"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "wavefount/core/random.h"

namespace wavefount::testing {
namespace {

double step_up(double x) {
  return 0.5 * std::erfc(-x / std::numbers::sqrt2);
}

struct TubePoint {
  double along = 0, across = 0;
};

TubePoint locate(const SceneTube& tube, double x, double y) {
  const double dx = x - tube.centre_x;
  const double dy = y - tube.centre_y;
  const double u = dx * std::cos(tube.angle) + dy * std::sin(tube.angle);
  const double v = -dx * std::sin(tube.angle) + dy * std::cos(tube.angle);
  if (tube.curvature == 0) return {u, v};
  const double radius = 1 / tube.curvature;
  const double side = std::copysign(1.0, radius);
  const double angle = std::atan2(u, side * (radius - v));
  return {angle * std::abs(radius), side * (std::abs(radius) - std::hypot(u, radius - v))};
}

/// Signed depth below the tube's surface, pixels.
double depth(const SceneTube& tube, const TubePoint& at) {
  const double half = tube.width / 2;
  const double to_wall = half - std::abs(at.across);
  const double beyond = std::abs(at.along) - tube.length / 2;
  if (!tube.round_ends) return std::min(to_wall, -beyond);
  const double past = beyond + half;
  return past > 0 ? half - std::hypot(past, at.across) : to_wall;
}

double tube_light(const TubeScene& scene, double x, double y) {
  double light = scene.outside;
  for (const auto& tube : scene.tubes) {
    const auto at = locate(tube, x, y);
    const double deep = depth(tube, at);
    const double share = std::clamp(1 - std::abs(at.across) * 2 / tube.width, 0.0, 1.0);
    const double thick = 1 - tube.roundness * (1 - std::sqrt(share * (2 - share)));
    light += tube.level * thick * step_up(deep / scene.blur);
    const double glow_sd = std::hypot(tube.glow_sd, scene.blur);
    light += tube.glow * tube.glow_sd / glow_sd * std::exp(-0.5 * std::pow(deep / glow_sd, 2));
  }
  return light;
}

}  // namespace

Point TubeScene::drift_at(int frame) const {
  return drift.empty() ? Point{} : drift.at(static_cast<std::size_t>(frame));
}

ImagePointer draw_frame(const TubeScene& scene, int frame) {
  auto image = make_image(scene.width, scene.height);
  RandomStream random(seed_from(scene.seed, std::to_string(frame)));
  const auto drift = scene.drift_at(frame);
  const double highest = std::ldexp(1.0, scene.bit_depth) - 1;
  const double fade = std::exp(-scene.bleaching * frame);
  for (int y = 0; y < scene.height; ++y) {
    for (int x = 0; x < scene.width; ++x) {
      const double px = x - drift.x;
      const double py = y - drift.y;
      double light = tube_light(scene, px, py);
      for (const auto& blob : scene.blobs) {
        if (frame < blob.first || frame > blob.last) continue;
        const double away = std::hypot(px - blob.x - blob.flow_x * frame, py - blob.y);
        if (away < blob.radius + 6 * scene.blur)
          light += blob.brightness * step_up((blob.radius - away) / scene.blur);
      }
      for (const auto& bubble : scene.bubbles) {
        const double away = std::hypot(px - bubble.x, py - bubble.y);
        light -= (light - scene.outside) * step_up((bubble.radius - away) / scene.blur);
      }
      const double u = 2.0 * x / scene.width - 1;
      const double v = 2.0 * y / scene.height - 1;
      light *= fade * (1 - scene.vignetting * (u * u + v * v) / 2);
      const double electrons = light * scene.gain;
      const double noisy =
          electrons + std::sqrt(electrons) * random.normal() + scene.read_noise * random.normal();
      const double counts = std::round(scene.offset + noisy / scene.gain);
      image->GetBufferPointer()[static_cast<std::ptrdiff_t>(y) * scene.width + x] =
          static_cast<float>(std::clamp(counts, 0.0, highest));
    }
  }
  return image;
}

SceneSource::SceneSource(TubeScene scene) : scene_(std::move(scene)) {
  description_.name = "scene";
  description_.width = scene_.width;
  description_.height = scene_.height;
  description_.frames = scene_.frames;
  description_.channels = {"reporter"};
  description_.bit_depth = scene_.bit_depth;
  description_.pixel_um = scene_.pixel_um;
  for (int frame = 0; frame < scene_.frames; ++frame) description_.times_min.push_back(frame);
}

ImagePointer SceneSource::frame(int index) const {
  auto image = draw_frame(scene_, index);
  if (std::find(spoiled_.begin(), spoiled_.end(), index) != spoiled_.end())
    image->FillBuffer(spoil_value_);
  return image;
}

std::unique_ptr<FrameReader> SceneSource::reader() const {
  class Reader : public FrameReader {
   public:
    explicit Reader(const SceneSource& source) : source_(source) {}
    ImagePointer read(int frame, int, int) override { return source_.frame(frame); }

   private:
    const SceneSource& source_;
  };
  return std::make_unique<Reader>(*this);
}

}  // namespace wavefount::testing
