#include "wavefount/synthetic/render.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <opencv2/imgproc.hpp>

#include "released_light.h"
#include "still_layers.h"
#include "wavefount/core/problem.h"
#include "wavefount/synthetic/camera_noise.h"
#include "wavefount/synthetic/counter_random.h"

namespace wavefount {
namespace {

// Beyond this spread the disc it came from no longer shows: the normal distribution of the same
// variance differs by less than 0.5 % of the peak.
constexpr double far_sigma_um = 24;

/// Uneven brightness inside a nucleus: three plane waves fixed to it.
class Texture {
  static constexpr int wave_count = 6;

 public:
  Texture(const SceneNucleus& nucleus, std::uint64_t seed) {
    RandomSequence random(seed, 1000 + static_cast<std::uint64_t>(nucleus.number));
    for (auto& wave : waves_) {
      const double turn = random.uniform(0, 2 * M_PI);
      const double cycles = random.uniform(0.25, 1.1);  // over the radius
      wave = {2 * M_PI * cycles * std::cos(turn), 2 * M_PI * cycles * std::sin(turn),
              random.uniform(0, 2 * M_PI)};
    }
    height_ = nucleus.texture * std::sqrt(2.0 / wave_count);
  }
  /// At a place relative to the centre in units of the radius.
  double at(double x, double y) const {
    double sum = 1;
    for (const auto& wave : waves_) sum += height_ * std::cos(wave.x * x + wave.y * y + wave.phase);
    return sum;
  }

 private:
  struct Wave {
    double x = 0, y = 0, phase = 0;
  };
  std::array<Wave, wave_count> waves_;
  double height_ = 0;
};

/// Pixels around a centre, wherever they lie with respect to the frame.
struct Window {
  Window(Point centre_px, double reach_px)
      : left(static_cast<int>(std::floor(centre_px.x - reach_px))),
        top(static_cast<int>(std::floor(centre_px.y - reach_px))),
        right(static_cast<int>(std::ceil(centre_px.x + reach_px))),
        bottom(static_cast<int>(std::ceil(centre_px.y + reach_px))) {}
  int left, top, right, bottom;  // inclusive
};

class FramePainter {
 public:
  FramePainter(const Scene& scene, const StillLayers& still, const FarLight::Cells& cells,
               int frame)
      : scene_(scene),
        still_(still),
        far_(cells),
        time_min_(scene.times_min[static_cast<std::size_t>(frame)]),
        drift_(scene.drift_um(frame)),
        image_(make_image(scene.width, scene.height)),
        pixels_(as_matrix(*image_)) {}

  ImagePointer paint(int frame) {
    pixels_.setTo(0);
    for (const auto& nucleus : scene_.nuclei)
      for (std::size_t i = 0; i < nucleus.lives.size(); ++i) paint_life(nucleus, i);
    add_still();
    const auto index = static_cast<std::size_t>(frame);
    if (index < scene_.nuisances.defocus_um.size() && scene_.nuisances.defocus_um[index] > 0)
      cv::GaussianBlur(pixels_, pixels_, {}, scene_.nuisances.defocus_um[index] / scene_.pixel_um);
    const double left = std::exp(-scene_.nuisances.bleaching_per_min * time_min_);
    cv::multiply(pixels_, still_.evenness, pixels_, left);
    return image_;
  }

 private:
  void paint_life(const SceneNucleus& nucleus, std::size_t index) {
    const auto& life = nucleus.lives[index];
    if (time_min_ < life.formed_min) return;
    const double elapsed = std::max(0.0, time_min_ - life.entry_min);
    const double held = std::exp(-elapsed / (life.dies ? life.fade_min : life.permeabilise_min));
    constexpr double gone = 1e-4;
    if (held > gone) paint_intact(nucleus, life, held);
    if (elapsed > 0 && !life.dies) paint_released(nucleus, index);
  }

  void paint_intact(const SceneNucleus& nucleus, const SceneLife& life, double held) {
    const double radius = life.radius_um(time_min_);
    const double light = life.brightness(time_min_) * held;
    const double stretch = 1 + nucleus.elongation + nucleus.lobes;
    RadialTable table(radius * stretch + 6 * scene_.optics.psf_um);
    table.add({radius, scene_.optics.psf_um, scene_.optics.dome}, 1);
    const Point centre = image_px(life.centre_um(time_min_));
    const Window window(centre, table.reach_um() * stretch / scene_.pixel_um);
    std::vector<float> values;
    const double sum = shape(nucleus, table, radius, centre, window, values);
    // Outline and texture change where the light is, never how much there is.
    const double area_px = M_PI * radius * radius / (scene_.pixel_um * scene_.pixel_um);
    if (sum > 0) stamp(window, values, light * area_px / sum);
  }

  /// Relative light in a window; returns its sum.
  double shape(const SceneNucleus& nucleus, const RadialTable& table, double radius_um,
               Point centre_px, const Window& window, std::vector<float>& values) const {
    const Texture texture(nucleus, scene_.seed);
    const double cosine = std::cos(nucleus.angle);
    const double sine = std::sin(nucleus.angle);
    double sum = 0;
    for (int y = window.top; y <= window.bottom; ++y)
      for (int x = window.left; x <= window.right; ++x) {
        const double dx = (x - centre_px.x) * scene_.pixel_um;
        const double dy = (y - centre_px.y) * scene_.pixel_um;
        const double u = dx * cosine + dy * sine;
        const double v = dy * cosine - dx * sine;
        const double square = std::max(u * u + v * v, 1e-12);
        const double distance = std::sqrt(square);
        const double outline = 1 + nucleus.elongation * (u * u - v * v) / square +
                               nucleus.lobes * u * (u * u - 3 * v * v) / (square * distance);
        double value = table.at(distance / outline);
        if (value > 0) value *= texture.at(u / radius_um, v / radius_um);
        values.push_back(static_cast<float>(value));
        sum += value;
      }
    return sum;
  }

  void stamp(const Window& window, const std::vector<float>& values, double scale) {
    const auto row_length = static_cast<std::size_t>(window.right - window.left + 1);
    for (int y = std::max(window.top, 0); y <= std::min(window.bottom, pixels_.rows - 1); ++y) {
      const auto row = static_cast<std::size_t>(y - window.top) * row_length;
      float* out = pixels_.ptr<float>(y);
      for (int x = std::max(window.left, 0); x <= std::min(window.right, pixels_.cols - 1); ++x)
        out[x] +=
            static_cast<float>(scale * values[row + static_cast<std::size_t>(x - window.left)]);
    }
  }

  void paint_released(const SceneNucleus& nucleus, std::size_t index) {
    const auto& life = nucleus.lives[index];
    const double left = left_in_cytoplasm(nucleus, index);
    if (left < 1e-3) return;
    const double radius = life.radius_um(life.entry_min);
    std::vector<Portion> near;
    double far_light = 0;
    double far_variance = 0;
    for (const auto& portion : released_portions(life, scene_.optics, time_min_)) {
      if (portion.sigma_um < far_sigma_um) {
        near.push_back(portion);
        continue;
      }
      far_light += portion.light;
      far_variance += portion.light * portion.sigma_um * portion.sigma_um;
    }
    if (!near.empty()) paint_near(nucleus, life, radius, near, left);
    if (far_light > 0) paint_far(nucleus, life, radius, far_variance / far_light, far_light * left);
  }

  /// Share of the released content that the nucleus has not taken up again since it re-formed.
  double left_in_cytoplasm(const SceneNucleus& nucleus, std::size_t index) const {
    if (index + 1 >= nucleus.lives.size()) return 1;
    const auto& next = nucleus.lives[index + 1];
    return std::exp(-next.import_per_min * std::max(0.0, time_min_ - next.formed_min));
  }

  void paint_far(const SceneNucleus& nucleus, const SceneLife& life, double radius_um,
                 double variance_um2, double light) {
    const double dome = scene_.optics.dome;
    const double own = radius_um * radius_um / 2 * (0.25 - dome / 6) / (0.5 - dome / 4);
    const auto& tube = scene_.tubes[static_cast<std::size_t>(nucleus.tube)];
    far_.add(tube, nucleus.tube, tube.place(life.centre_um(time_min_)),
             std::sqrt(variance_um2 + own), light * M_PI * radius_um * radius_um);
  }

  void paint_near(const SceneNucleus& nucleus, const SceneLife& life, double radius_um,
                  const std::vector<Portion>& portions, double left) {
    double widest = 0;
    for (const auto& portion : portions) widest = std::max(widest, portion.sigma_um);
    RadialTable table(radius_um + 4.5 * widest);
    for (const auto& portion : portions)
      table.add({radius_um, portion.sigma_um, scene_.optics.dome}, portion.light * left);
    const auto& tube = scene_.tubes[static_cast<std::size_t>(nucleus.tube)];
    const Point centre = life.centre_um(time_min_);
    for (const Point& source : mirrored(tube, centre, table.reach_um()))
      paint_radial(table, image_px(source));
  }

  /// The centre and its mirror images in walls and closed ends that are near enough to throw light
  /// back.
  static std::vector<Point> mirrored(const Tube& tube, Point centre, double reach_um) {
    std::vector<Point> sources{centre};
    const auto line = tube.place(centre);
    const double half = tube.width_um / 2;
    for (const double wall : {-half, half})
      if (std::abs(wall - line.across_um) < reach_um)
        sources.push_back(point_at(tube, line.along_um, 2 * wall - line.across_um));
    if (tube.left_end == Boundary::closed && line.along_um < reach_um)
      sources.push_back(point_at(tube, -line.along_um, line.across_um));
    if (tube.right_end == Boundary::closed && tube.length_um - line.along_um < reach_um)
      sources.push_back(point_at(tube, 2 * tube.length_um - line.along_um, line.across_um));
    return sources;
  }

  void paint_radial(const RadialTable& table, Point centre_px) {
    const Window window(centre_px, table.reach_um() / scene_.pixel_um);
    const int shift_x =
        still_.margin_px - static_cast<int>(std::lround(drift_.x / scene_.pixel_um));
    const int shift_y =
        still_.margin_px - static_cast<int>(std::lround(drift_.y / scene_.pixel_um));
    for (int y = std::max(window.top, 0); y <= std::min(window.bottom, pixels_.rows - 1); ++y) {
      float* out = pixels_.ptr<float>(y);
      const float* inside = still_.inside.ptr<float>(y + shift_y);
      const double dy = (y - centre_px.y) * scene_.pixel_um;
      for (int x = std::max(window.left, 0); x <= std::min(window.right, pixels_.cols - 1); ++x) {
        const double dx = (x - centre_px.x) * scene_.pixel_um;
        out[x] += inside[x + shift_x] * static_cast<float>(table.at(std::sqrt(dx * dx + dy * dy)));
      }
    }
  }

  /// Cuts the frame out of the canvas where the drift has carried it, linearly between pixels, and
  /// adds the light that has spread far.
  void add_still() {
    const double left = still_.margin_px - drift_.x / scene_.pixel_um;
    const double top = still_.margin_px - drift_.y / scene_.pixel_um;
    const auto column = static_cast<int>(std::floor(left));
    const auto beside = static_cast<float>(left - column);
    const auto width = static_cast<std::size_t>(pixels_.cols);
    std::vector<float> far;
    for (int y = 0; y < pixels_.rows; ++y) {
      const auto row = static_cast<int>(std::floor(top + y));
      const auto below = static_cast<float>(top + y - row);
      const float* upper = still_.content.ptr<float>(row) + column;
      const float* lower = still_.content.ptr<float>(row + 1) + column;
      float* out = pixels_.ptr<float>(y);
      for (std::size_t x = 0; x < width; ++x) {
        const float here = upper[x] + below * (lower[x] - upper[x]);
        const float next = upper[x + 1] + below * (lower[x + 1] - upper[x + 1]);
        out[x] += here + beside * (next - here);
      }
      if (far_.empty()) continue;
      far_.row(left, top + y, width, far);
      const float* inside =
          still_.inside.ptr<float>(static_cast<int>(std::lround(top)) + y) + std::lround(left);
      for (std::size_t x = 0; x < width; ++x) out[x] += inside[x] * far[x];
    }
  }

  Point image_px(Point place_um) const {
    return {(place_um.x + drift_.x) / scene_.pixel_um, (place_um.y + drift_.y) / scene_.pixel_um};
  }

  const Scene& scene_;
  const StillLayers& still_;
  FarLight far_;
  double time_min_;
  Point drift_;
  ImagePointer image_;
  cv::Mat pixels_;
};

}  // namespace

struct SceneRenderer::Layers {
  explicit Layers(const Scene& scene) : still(scene), cells(scene, still) {}
  StillLayers still;
  FarLight::Cells cells;
};

SceneRenderer::SceneRenderer(const Scene& scene)
    : scene_(scene), layers_(std::make_unique<Layers>(scene_)) {}

SceneRenderer::~SceneRenderer() = default;

ImagePointer SceneRenderer::light(int frame) const {
  if (frame < 0 || frame >= scene_.frames())
    throw Problem("scene " + scene_.name + " has no frame " + std::to_string(frame) + ".");
  return FramePainter(scene_, layers_->still, layers_->cells, frame).paint(frame);
}

ImagePointer SceneRenderer::frame(int index) const {
  auto image = light(index);
  expose(*image, scene_.camera, scene_.seed, index);
  return image;
}

ImagePointer render_frame(const Scene& scene, int frame) {
  return SceneRenderer(scene).frame(frame);
}

}  // namespace wavefount
