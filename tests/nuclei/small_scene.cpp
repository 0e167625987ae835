#include "small_scene.h"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <opencv2/imgproc.hpp>

#include "wavefount/core/random.h"
#include "wavefount/core/robust.h"
#include "wavefount/nuclei/wall_glow.h"

namespace wavefount::nuclei {
namespace {

/// Distance from the centre over the distance of the outline in that direction.
double relative_distance(const TrueNucleus& nucleus, double x, double y) {
  const double dx = x - nucleus.x;
  const double dy = y - nucleus.y;
  const double along = dx * std::cos(nucleus.angle) + dy * std::sin(nucleus.angle);
  const double across = dy * std::cos(nucleus.angle) - dx * std::sin(nucleus.angle);
  const double stretch = std::sqrt(nucleus.aspect);
  return std::hypot(along / stretch, across * stretch) / nucleus.radius;
}

void paint(cv::Mat1f& light, const TrueNucleus& nucleus, RandomStream& random) {
  const double phase_x = 6.28 * random.uniform();
  const double phase_y = 6.28 * random.uniform();
  const double reach = nucleus.radius * std::sqrt(nucleus.aspect) + 2;
  constexpr int fine = 5;
  for (int y = std::max(0, static_cast<int>(nucleus.y - reach));
       y <= std::min(light.rows - 1, static_cast<int>(nucleus.y + reach) + 1); ++y) {
    for (int x = std::max(0, static_cast<int>(nucleus.x - reach));
         x <= std::min(light.cols - 1, static_cast<int>(nucleus.x + reach) + 1); ++x) {
      int inside = 0;
      for (int i = 0; i < fine * fine; ++i)
        if (relative_distance(nucleus, x + ((i % fine) + 0.5) / fine - 0.5,
                              y + ((i / fine) + 0.5) / fine - 0.5) < 1)
          ++inside;
      const double waves = std::sin(5 * (x - nucleus.x) / nucleus.radius + phase_x) *
                           std::sin(5 * (y - nucleus.y) / nucleus.radius + phase_y);
      light(y, x) += static_cast<float>(nucleus.brightness * (1 + 2 * nucleus.texture * waves) *
                                        inside / (fine * fine));
    }
  }
}

}  // namespace

ImagePointer SmallScene::frame() const {
  RandomStream random(seed);
  cv::Mat1f light(height, width, 0.0F);
  for (int y = 0; y < height; ++y) {
    for (int x = 0; x < width; ++x) {
      const double wall = wall_px > 0 ? std::min(y - wall_px, height - 1 - wall_px - y) : 1e9;
      const double end = end_px > 0 ? std::min(x - end_px, width - 1 - end_px - x) : 1e9;
      const double edge = std::min(wall, end);
      double value = edge >= 0 ? cytoplasm : outside;
      value *= 1 + mottle * std::sin(x / 37.0) * std::sin(y / 29.0 + 1);
      value += glow * std::exp(-0.5 * edge * edge / (glow_px * glow_px)) *
               (1 + 0.4 * std::sin(x / 23.0));
      light(y, x) = static_cast<float>(value);
    }
  }
  for (const TrueNucleus& nucleus : nuclei) paint(light, nucleus, random);
  for (int i = 0; i < debris; ++i)
    paint(light, {width * random.uniform(), height * random.uniform(), 1.5, 3 * cytoplasm}, random);
  cv::GaussianBlur(light, light, {}, psf_px, psf_px, cv::BORDER_REPLICATE);
  auto image = make_image(width, height);
  cv::Mat1f pixels(as_matrix(*image));
  for (int y = 0; y < height; ++y) {
    for (int x = 0; x < width; ++x) {
      const double far =
          std::hypot(x - width / 2.0, y - height / 2.0) / std::hypot(width / 2.0, height / 2.0);
      const double mean = light(y, x) * (1 - vignetting * far * far);
      const double noise = std::sqrt(std::max(mean, 0.0) * gain + read_noise * read_noise) / gain;
      const double counts = std::round(dark + mean + noise * random.normal());
      pixels(y, x) = static_cast<float>(std::clamp(counts, 0.0, most_counts));
    }
  }
  return image;
}

CameraModel SmallScene::camera() const {
  CameraModel camera;
  camera.gain_electrons_per_count = gain;
  camera.read_noise_electrons = std::sqrt(read_noise * read_noise + gain * gain / 12);
  camera.dark_offset_counts = dark;
  camera.saturation_counts = most_counts;
  return camera;
}

Tubes SmallScene::tubes() const {
  Tubes tubes;
  Tube tube;
  tube.measured = wall_px > 0;
  const double left = end_px > 0 ? end_px : 0;
  const double right = width - 1 - left;
  const double top = wall_px;
  const double bottom = height - 1 - wall_px;
  for (const auto& corner :
       {Point{left, top}, Point{right, top}, Point{right, bottom}, Point{left, bottom}})
    tube.outline_um.push_back({corner.x * pixel_um, corner.y * pixel_um});
  tubes.tubes.push_back(tube);
  return tubes;
}

ReducedGrid SmallScene::grid() const {
  return {0, 0, factor, width / factor, height / factor};
}

TubeMask SmallScene::mask() const {
  return {tubes(), grid(), pixel_um, 0, 0};
}

ImagePointer SmallScene::reduced(const Image& full) const {
  const ReducedGrid size = grid();
  auto image = make_image(size.width, size.height);
  const cv::Mat1f from(as_matrix(full));
  cv::Mat1f to(as_matrix(*image));
  for (int y = 0; y < size.height; ++y)
    for (int x = 0; x < size.width; ++x)
      to(y, x) =
          static_cast<float>(cv::mean(from(cv::Rect(x * factor, y * factor, factor, factor)))[0]);
  return image;
}

void SmallScene::scatter(int count, double radius, double brightness, double radius_spread,
                         double brightness_spread) {
  RandomStream random(seed + 1000);
  for (int tries = 0; tries < 20000 && static_cast<int>(nuclei.size()) < count; ++tries) {
    TrueNucleus made;
    made.radius = radius * std::clamp(1 + radius_spread * random.normal(), 0.6, 1.5);
    made.brightness = brightness * std::clamp(1 + brightness_spread * random.normal(), 0.5, 2.0);
    const double margin = made.radius + 4;
    made.x = end_px + margin + (width - 2 * (margin + end_px)) * random.uniform();
    made.y = wall_px + margin + (height - 2 * (margin + wall_px)) * random.uniform();
    made.aspect = 1 + 0.3 * random.uniform();
    made.angle = 3.1 * random.uniform();
    const bool clear = std::none_of(nuclei.begin(), nuclei.end(), [&](const TrueNucleus& other) {
      return std::hypot(other.x - made.x, other.y - made.y) <
             1.4 * (other.radius + made.radius) + 4;
    });
    if (clear) nuclei.push_back(made);
  }
}

Detection detect(const SmallScene& scene, const Image& frame) {
  return find_nuclei(*scene.reduced(frame), scene.mask(), scene.camera(), scene.pixel_um, {});
}

std::vector<Sighting> measure(const SmallScene& scene, const Image& frame) {
  const OutlineLimits limits{2.5 / scene.pixel_um, 30 / scene.pixel_um, 5, 3.5,
                             10 / scene.pixel_um};
  const TubeMask mask = scene.mask();
  const CameraModel camera = scene.camera();
  const Detection found = detect(scene, frame);
  const ImagePointer even = without_glow(frame, scene.grid(), found.glow);
  return outline_nuclei({*even, *even, mask, camera}, found.candidates, limits);
}

namespace {

double overlap(const TrueNucleus& nucleus, const Sighting& sighting, int width, int height) {
  int both = 0;
  int outlined = 0;
  for (const Run& run : sighting.runs) {
    outlined += run.x1 - run.x0;
    for (int x = run.x0; x < run.x1; ++x)
      if (relative_distance(nucleus, x, run.y) < 1) ++both;
  }
  int whole = 0;
  for (int y = 0; y < height; ++y) {
    if (std::abs(y - nucleus.y) > 3 * nucleus.radius) continue;
    for (int x = 0; x < width; ++x)
      if (relative_distance(nucleus, x, y) < 1) ++whole;
  }
  return static_cast<double>(both) / (outlined + whole - both);
}

}  // namespace

Comparison compare(const SmallScene& scene, const std::vector<Sighting>& sightings) {
  Comparison result;
  std::vector<char> used(sightings.size(), 0);
  std::vector<double> radius;
  std::vector<double> brightness;
  std::vector<double> integrated;
  std::vector<double> pulls;
  double squares = 0;
  for (const TrueNucleus& nucleus : scene.nuclei) {
    double nearest = nucleus.radius;
    std::size_t best = sightings.size();
    for (std::size_t i = 0; i < sightings.size(); ++i) {
      const double apart = std::hypot(sightings[i].x_px - nucleus.x, sightings[i].y_px - nucleus.y);
      if (used[i] != 0 || apart >= nearest) continue;
      nearest = apart;
      best = i;
    }
    if (best == sightings.size()) {
      ++result.missed;
      continue;
    }
    used[best] = 1;
    ++result.found;
    const Sighting& seen = sightings[best];
    squares += nearest * nearest;
    radius.push_back(seen.radius_px / nucleus.radius - 1);
    brightness.push_back(seen.brightness / nucleus.brightness - 1);
    integrated.push_back(seen.integrated / (nucleus.brightness * std::numbers::pi * nucleus.radius *
                                            nucleus.radius) -
                         1);
    pulls.push_back((seen.brightness - nucleus.brightness) / std::sqrt(seen.brightness_variance));
    if (!seen.runs.empty()) result.jaccard += overlap(nucleus, seen, scene.width, scene.height);
  }
  result.invented = static_cast<int>(std::count(used.begin(), used.end(), 0));
  if (!scene.nuclei.empty()) result.jaccard /= static_cast<double>(scene.nuclei.size());
  result.place_error_px = std::sqrt(squares / std::max(result.found, 1));
  result.radius_bias = median(radius);
  result.brightness_bias = median(brightness);
  result.integrated_bias = median(integrated);
  result.radius_scatter = robust_sd(radius);
  result.brightness_scatter = robust_sd(brightness);
  result.pull = robust_sd(pulls);
  return result;
}

}  // namespace wavefount::nuclei
