#include <algorithm>
#include <cmath>

#include "released_light.h"
#include "wavefount/core/robust.h"
#include "wavefount/synthetic/blurred_disc.h"
#include "wavefount/synthetic/truth.h"

namespace wavefount {
namespace {

constexpr double least_contrast = 1;  // in units of one pixel's noise
constexpr double least_summed_contrast = 8;
constexpr double entry_margin_frames = 3;  // frames needed before and after an entry

double bleached(const Scene& scene, double time_min) {
  return std::exp(-scene.nuisances.bleaching_per_min * time_min);
}

double pixel_noise(const Scene& scene, double light) {
  const auto& camera = scene.camera;
  const double electrons = light * camera.gain_electrons_per_count;
  return std::sqrt(electrons + camera.read_noise_electrons * camera.read_noise_electrons) /
         camera.gain_electrons_per_count;
}

bool in_image(const Scene& scene, Point image_um, double rim_um) {
  return image_um.x > rim_um && image_um.y > rim_um &&
         image_um.x < (scene.width - 1) * scene.pixel_um - rim_um &&
         image_um.y < (scene.height - 1) * scene.pixel_um - rim_um;
}

Point image_place(const Scene& scene, const SceneLife& life, int frame) {
  const auto drift = scene.drift_um(frame);
  const auto centre = life.centre_um(scene.times_min[static_cast<std::size_t>(frame)]);
  return {centre.x + drift.x, centre.y + drift.y};
}

/// Contrast at the centre over cytoplasm, counts at even light.
double contrast(const Scene& scene, const SceneLife& life, double time_min, double sigma_um) {
  const double radius = life.radius_um(time_min);
  const double intact =
      life.brightness(time_min) * BlurredDisc{radius, sigma_um, scene.optics.dome}.at(0);
  const double elapsed = time_min - life.entry_min;
  if (elapsed <= 0) return intact;
  if (life.dies) return intact * std::exp(-elapsed / life.fade_min);
  double sum = intact * std::exp(-elapsed / life.permeabilise_min);
  for (const auto& portion : released_portions(life, scene.optics, time_min))
    sum += portion.light * BlurredDisc{radius, portion.sigma_um, scene.optics.dome}.at(0);
  return sum;
}

double blur_um(const Scene& scene, int frame) {
  const auto index = static_cast<std::size_t>(frame);
  const double added =
      index < scene.nuisances.defocus_um.size() ? scene.nuisances.defocus_um[index] : 0;
  return std::hypot(scene.optics.psf_um, added);
}

}  // namespace

Showing showing(const Scene& scene, const SceneLife& life, int frame) {
  const double time = scene.times_min[static_cast<std::size_t>(frame)];
  if (time < life.formed_min) return Showing::no;
  const Point place = image_place(scene, life, frame);
  if (!in_image(scene, place, 0)) return Showing::no;
  const double radius = life.radius_um(time);
  const double even = scene.evenness(place) * bleached(scene, time);
  const double height = even * contrast(scene, life, time, blur_um(scene, frame));
  const double noise = pixel_noise(scene, even * scene.optics.cytoplasm + height);
  const double area_px = M_PI * radius * radius / (scene.pixel_um * scene.pixel_um);
  const bool stands_out = height >= least_contrast * noise &&
                          height * std::sqrt(area_px) >= least_summed_contrast * noise;
  if (time > life.entry_min) return stands_out ? Showing::faint : Showing::no;
  if (!stands_out || !in_image(scene, place, radius)) return Showing::faint;
  return Showing::yes;
}

bool entry_counts(const Scene& scene, const SceneLife& life) {
  if (life.dies || scene.frames() < 2 * entry_margin_frames) return false;
  const auto& times = scene.times_min;
  const auto after = std::lower_bound(times.begin(), times.end(), life.entry_min);
  const auto before = after - times.begin();
  if (static_cast<double>(before) < entry_margin_frames ||
      static_cast<double>(times.end() - after) < entry_margin_frames)
    return false;
  return showing(scene, life, static_cast<int>(before) - 1) == Showing::yes;
}

double median_spacing_um(const Scene& scene, int tube) {
  std::vector<double> nearest;
  for (const auto& nucleus : scene.nuclei) {
    double least = 1e9;
    for (const auto& other : scene.nuclei)
      if (other.tube == tube && other.number != nucleus.number)
        least = std::min(least, std::hypot(other.along_um - nucleus.along_um,
                                           other.across_um - nucleus.across_um));
    if (nucleus.tube == tube && least < 1e9) nearest.push_back(least);
  }
  return median(nearest);
}

}  // namespace wavefount
