#include "detections.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

#include "wavefount/core/robust.h"

namespace wavefount::tracking {
namespace {

/// Without a second nucleus in view: nuclei of extract lie some ten radii apart.
constexpr double radii_per_spacing = 10;

bool finite(const Sighting& seen) {
  return std::isfinite(seen.x_px) && std::isfinite(seen.y_px) && std::isfinite(seen.radius_px) &&
         std::isfinite(seen.area_px) && std::isfinite(seen.brightness) &&
         std::isfinite(seen.integrated) && std::isfinite(seen.detection_sigma) &&
         seen.radius_px > 0;
}

Detection detection_of(const Sighting& seen, int index, int step, Point shift_px, double pixel_um) {
  Detection one;
  one.step = step;
  one.sighting = index;
  one.place_um = {(seen.x_px - shift_px.x) * pixel_um, (seen.y_px - shift_px.y) * pixel_um};
  one.radius_um = seen.radius_px * pixel_um;
  one.area_um2 = seen.area_px > 0 ? seen.area_px * pixel_um * pixel_um
                                  : std::numbers::pi * one.radius_um * one.radius_um;
  one.brightness = seen.brightness;
  one.integrated = seen.integrated;
  one.sigma = seen.detection_sigma;
  return one;
}

void mark_jumps(FilmDetections& film, const Observations& observations, const Drift& drift) {
  film.jump.assign(film.frames.size(), false);
  for (int step = 1; step < film.steps(); ++step) {
    const int before = observations.frames[film.frames[step - 1]].frame;
    const int now = observations.frames[film.frames[step]].frame;
    film.jump[step] = std::any_of(drift.jumps.begin(), drift.jumps.end(),
                                  [&](int frame) { return frame > before && frame <= now; });
  }
}

double nearest_in_step(const FilmDetections& film, int detection) {
  const int step = film.all[detection].step;
  double nearest = std::numeric_limits<double>::infinity();
  for (int other = film.first[step]; other < film.first[step + 1]; ++other)
    if (other != detection)
      nearest = std::min(nearest, distance(film.all[detection].place_um, film.all[other].place_um));
  return nearest;
}

/// Lower quartile over frames of the median nearest distance: while a wave has emptied part of the
/// tube the distances are too long.
double typical_spacing(const FilmDetections& film) {
  std::vector<double> by_step;
  for (int step = 0; step < film.steps(); ++step) {
    if (film.first[step + 1] - film.first[step] < 2) continue;
    std::vector<double> nearest;
    for (int one = film.first[step]; one < film.first[step + 1]; ++one)
      nearest.push_back(nearest_in_step(film, one));
    by_step.push_back(median(std::move(nearest)));
  }
  if (by_step.empty()) return radii_per_spacing * film.radius_um;
  return std::max(quantile(std::move(by_step), 0.25), film.radius_um);
}

double covered_area(const FilmDetections& film, const Tube& tube) {
  const double own = tube.outline_um.size() > 2 ? tube.area_um2() : 0;
  if (own > 0) return own;
  double x0 = 0, x1 = 0, y0 = 0, y1 = 0;
  for (std::size_t i = 0; i < film.all.size(); ++i) {
    const Point place = film.all[i].place_um;
    x0 = i == 0 ? place.x : std::min(x0, place.x);
    x1 = i == 0 ? place.x : std::max(x1, place.x);
    y0 = i == 0 ? place.y : std::min(y0, place.y);
    y1 = i == 0 ? place.y : std::max(y1, place.y);
  }
  return (x1 - x0 + film.spacing_um) * (y1 - y0 + film.spacing_um);
}

double typical_interval(const std::vector<double>& times) {
  std::vector<double> steps;
  for (std::size_t i = 1; i < times.size(); ++i) steps.push_back(times[i] - times[i - 1]);
  const double typical = median(std::move(steps));
  return typical > 0 ? typical : 1;
}

}  // namespace

Point drift_px(const Drift& drift, int frame) {
  const auto at = static_cast<std::size_t>(frame);
  if (frame < 0 || at >= drift.x_px.size() || at >= drift.y_px.size()) return {};
  return {drift.x_px[at], drift.y_px[at]};
}

FilmDetections gather_detections(const FilmDescription& film, const Observations& observations,
                                 const Tube& tube, const Drift& drift) {
  FilmDetections gathered;
  gathered.pixel_um = film.pixel_um > 0 ? film.pixel_um : 1;
  gathered.first.push_back(0);
  std::vector<double> radii;
  for (std::size_t i = 0; i < observations.frames.size(); ++i) {
    const auto& frame = observations.frames[i];
    if (!frame.usable) continue;
    const int step = gathered.steps();
    const Point shift = drift_px(drift, frame.frame);
    for (std::size_t j = 0; j < frame.sightings.size(); ++j) {
      if (!finite(frame.sightings[j])) continue;
      gathered.all.push_back(
          detection_of(frame.sightings[j], static_cast<int>(j), step, shift, gathered.pixel_um));
      radii.push_back(gathered.all.back().radius_um);
    }
    gathered.frames.push_back(static_cast<int>(i));
    gathered.time_min.push_back(frame.time_min);
    gathered.first.push_back(static_cast<int>(gathered.all.size()));
  }
  mark_jumps(gathered, observations, drift);
  gathered.interval_min = typical_interval(gathered.time_min);
  if (!radii.empty()) gathered.radius_um = median(std::move(radii));
  gathered.spacing_um = typical_spacing(gathered);
  gathered.area_um2 = covered_area(gathered, tube);
  return gathered;
}

}  // namespace wavefount::tracking
