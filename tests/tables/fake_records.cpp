#include "fake_records.h"

#include <algorithm>
#include <cmath>
#include <memory>
#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/core/interphase.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/prescan.h"
#include "wavefount/core/reduced_film.h"
#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"

namespace wavefount::fake {
namespace {

constexpr double margin_um = 40;  // of the image around the tube
constexpr double mitosis_min = 8;
constexpr double plateau = 600;
constexpr double cytoplasm = 400;
constexpr double filling_per_min = 0.2;
constexpr double radius_um = 18;
constexpr double entry_se_min = 0.12;

struct Place {
  double along = 0, across = 0;
};

/// Two staggered rows of nuclei.
std::vector<Place> places_of(const Scene& scene) {
  std::vector<Place> places;
  const int count = static_cast<int>(scene.length_um / scene.spacing_um);
  for (int i = 0; i < count; ++i)
    places.push_back({(i + 0.5) * scene.spacing_um, (i % 2 ? 0.2 : -0.2) * scene.width_um});
  return places;
}

Point on_image(const Scene& scene, const Place& place) {
  const double x = margin_um + place.along;
  const double y = margin_um + scene.width_um / 2 + place.across;
  return scene.upright ? Point{y, x} : Point{x, y};
}

double entry_min(const Scene& scene, const Place& place, int wave) {
  return scene.first_entry_min + wave * scene.period_min +
         std::abs(place.along - scene.origin_um) / scene.speed_um_per_min;
}

double last_min(const Scene& scene) {
  return (scene.frames - 1) * scene.interval_min;
}

/// Brightness above cytoplasm at a time: filling, then gone at entry.
double brightness_at(const Scene& scene, const Place& place, double time_min) {
  for (int wave = 0; wave <= scene.waves; ++wave) {
    const double entry = entry_min(scene, place, wave);
    const double formed = wave == 0 ? -30 : entry - scene.period_min + mitosis_min;
    if (time_min < formed) return 0;
    if (time_min <= entry || wave == scene.waves)
      return plateau * (1 - std::exp(-filling_per_min * (time_min - formed)));
  }
  return 0;
}

double drift_px_at(const Scene& scene, int frame) {
  return scene.frames > 1 ? scene.drift_px * frame / (scene.frames - 1) : 0;
}

FilmDescription film_of(const Scene& scene) {
  FilmDescription film;
  film.name = scene.name;
  const double long_um = scene.length_um + 2 * margin_um;
  const double short_um = scene.width_um + 2 * margin_um;
  film.width = static_cast<int>((scene.upright ? short_um : long_um) / scene.pixel_um);
  film.height = static_cast<int>((scene.upright ? long_um : short_um) / scene.pixel_um);
  film.frames = scene.frames;
  film.pixel_um = scene.pixel_um;
  film.channels = {"reporter"};
  for (int frame = 0; frame < scene.frames; ++frame)
    film.times_min.push_back(frame * scene.interval_min);
  return film;
}

Tube tube_of(const Scene& scene) {
  Tube tube;
  tube.measured = scene.tube;
  tube.width_um = scene.width_um;
  tube.length_um = scene.length_um;
  const double half = scene.width_um / 2;
  for (const Place corner : {Place{0, -half}, Place{scene.length_um, -half},
                             Place{scene.length_um, half}, Place{0, half}})
    tube.outline_um.push_back(on_image(scene, corner));
  tube.axis_um = {on_image(scene, {0, 0}), on_image(scene, {scene.length_um, 0})};
  if (scene.open_right) tube.right_end = Boundary::open;
  return tube;
}

std::vector<Run> disc(double x_px, double y_px, double radius_px) {
  std::vector<Run> runs;
  for (int y = static_cast<int>(std::ceil(y_px - radius_px)); y <= y_px + radius_px; ++y) {
    const double half = std::sqrt(std::max(0.0, radius_px * radius_px - (y - y_px) * (y - y_px)));
    const int x0 = static_cast<int>(std::ceil(x_px - half));
    const int x1 = static_cast<int>(std::floor(x_px + half)) + 1;
    if (y >= 0 && x0 >= 0 && x1 > x0)
      runs.push_back({static_cast<std::uint16_t>(y), static_cast<std::uint16_t>(x0),
                      static_cast<std::uint16_t>(x1)});
  }
  return runs;
}

TracePoint point_of(const Scene& scene, const Place& place, int frame) {
  TracePoint point;
  const Point um = on_image(scene, place);
  point.frame = frame;
  point.time_min = frame * scene.interval_min;
  point.x_um = um.x;
  point.y_um = um.y;
  point.x_px = um.x / scene.pixel_um + drift_px_at(scene, frame);
  point.y_px = um.y / scene.pixel_um;
  point.brightness = brightness_at(scene, place, point.time_min);
  point.brightness_variance = 4;
  point.cytoplasm = cytoplasm;
  point.found = point.brightness > 50;
  point.radius_um = point.found ? radius_um : 0;
  point.area_um2 = point.found ? 3.14159265 * radius_um * radius_um : 0;
  point.integrated = point.brightness * 250;
  return point;
}

void see(const Scene& scene, TracePoint& point, FrameObservation& frame) {
  if (!point.found) return;
  Sighting sighting;
  sighting.x_px = point.x_px;
  sighting.y_px = point.y_px;
  sighting.radius_px = radius_um / scene.pixel_um;
  sighting.brightness = point.brightness;
  sighting.cytoplasm = point.cytoplasm;
  sighting.runs = disc(point.x_px, point.y_px, sighting.radius_px);
  point.sighting = static_cast<int>(frame.sightings.size());
  frame.sightings.push_back(sighting);
}

Observations empty_observations(const Scene& scene, const FilmDescription& film) {
  Observations observations;
  for (int frame = 0; frame < scene.frames; ++frame) {
    FrameObservation observation;
    observation.frame = frame;
    observation.time_min = film.times_min[static_cast<std::size_t>(frame)];
    observation.tube_pixels = 1000;
    observation.total_light = 1000 * cytoplasm * std::exp(-0.001 * observation.time_min);
    observations.frames.push_back(observation);
  }
  return observations;
}

void put_nuclei(const Scene& scene, RecordStore& records) {
  auto observations = empty_observations(scene, records.get<FilmDescription>());
  Nuclei nuclei;
  nuclei.mitosis_min = mitosis_min;
  for (const auto& place : places_of(scene)) {
    Nucleus nucleus;
    nucleus.id = static_cast<int>(nuclei.nuclei.size()) + 1;
    for (int frame = 0; frame < scene.frames; ++frame) {
      nucleus.points.push_back(point_of(scene, place, frame));
      see(scene, nucleus.points.back(), observations.frames[static_cast<std::size_t>(frame)]);
    }
    nuclei.nuclei.push_back(std::move(nucleus));
  }
  records.put(std::move(observations));
  records.put(std::move(nuclei));
}

void put_drift(const Scene& scene, RecordStore& records) {
  Drift drift;
  for (int frame = 0; frame < scene.frames; ++frame) {
    drift.x_px.push_back(drift_px_at(scene, frame));
    drift.y_px.push_back(0);
  }
  records.put(drift);
}

float pixel_at(const Scene& scene, const Tube& tube, Point um, double time_min) {
  if (!inside(tube.outline_um, um)) return 100;
  double value = cytoplasm;
  for (const auto& place : places_of(scene)) {
    const Point centre = on_image(scene, place);
    const double distance = std::hypot(um.x - centre.x, um.y - centre.y);
    if (distance > 2 * radius_um) continue;
    value += brightness_at(scene, place, time_min) / (1 + std::exp((distance - radius_um) / 2));
  }
  return static_cast<float>(value + 15 * std::sin(um.x * 0.9) * std::cos(um.y * 1.3 + time_min));
}

void put_reduced_film(const Scene& scene, const std::filesystem::path& file, RecordStore& records) {
  const auto& film = records.get<FilmDescription>();
  const auto tube = tube_of(scene);
  const int width = film.width / scene.reduction;
  const int height = film.height / scene.reduction;
  auto reduced = std::make_shared<ReducedFilm>(file, scene.frames, scene.reduction, 0, 0, width,
                                               height, 0, 4000);
  const double centre = (scene.reduction - 1) / 2.0;
  for (int frame = 0; frame < scene.frames; ++frame) {
    auto image = make_image(width, height);
    for (int y = 0; y < height; ++y) {
      for (int x = 0; x < width; ++x) {
        const Point um = {
            (x * scene.reduction + centre - drift_px_at(scene, frame)) * scene.pixel_um,
            (y * scene.reduction + centre) * scene.pixel_um};
        image->GetBufferPointer()[y * width + x] =
            pixel_at(scene, tube, um, frame * scene.interval_min);
      }
    }
    reduced->write(frame, *image);
  }
  records.share(std::move(reduced));
}

Interphase interphase_of(const Scene& scene, const Place& place, int nucleus, int wave) {
  Interphase interphase;
  const double entry = entry_min(scene, place, wave);
  interphase.nucleus = nucleus;
  interphase.index = wave;
  interphase.start = wave == 0 ? Start::already_present : Start::seen;
  interphase.first_frame =
      wave == 0
          ? 0
          : static_cast<int>((entry - scene.period_min + mitosis_min) / scene.interval_min) + 1;
  interphase.last_frame = std::min(static_cast<int>(entry / scene.interval_min), scene.frames - 1);
  interphase.place_um = on_image(scene, place);
  interphase.brightness_mean = 0.7 * plateau;
  interphase.brightness_peak = 0.97 * plateau;
  interphase.radius_um = radius_um;
  if (wave < scene.waves && entry < last_min(scene))
    interphase.entry = Entry{entry, entry_se_min, entry + 0.6, "fixed aperture"};
  interphase.outcome = interphase.entry ? Outcome::entered : Outcome::unfinished;
  if (wave == 0) return interphase;
  interphase.formed_min = entry - scene.period_min + mitosis_min;
  ImportFit fit;
  fit.curved = true;
  fit.formed_min = interphase.formed_min;
  fit.rate_per_min = filling_per_min;
  fit.rate_se_per_min = 0.01;
  fit.plateau = plateau;
  fit.initial = plateau * filling_per_min;
  fit.initial_se = 3;
  fit.start_min = *interphase.formed_min;
  interphase.import = fit;
  return interphase;
}

void put_interphases(const Scene& scene, RecordStore& records) {
  Interphases interphases;
  int nucleus = 0;
  for (const auto& place : places_of(scene)) {
    ++nucleus;
    for (int wave = 0; wave <= scene.waves; ++wave) {
      auto interphase = interphase_of(scene, place, nucleus, wave);
      if (interphase.formed_min.value_or(0) >= last_min(scene)) break;
      const bool ends = !interphase.entry;
      interphases.interphases.push_back(std::move(interphase));
      if (ends) break;
    }
  }
  records.put(std::move(interphases));
}

void put_entries(const Scene& scene, RecordStore& records) {
  const auto places = places_of(scene);
  WaveEntries entries;
  const auto& interphases = records.get<Interphases>().interphases;
  for (std::size_t i = 0; i < interphases.size(); ++i) {
    const auto& interphase = interphases[i];
    if (!interphase.entry) continue;
    const auto& place = places[static_cast<std::size_t>(interphase.nucleus - 1)];
    WaveEntry entry;
    entry.interphase = static_cast<int>(i);
    entry.nucleus = interphase.nucleus;
    entry.cycle = entry.wave = interphase.index + 1;
    entry.time_min = interphase.entry->time_min;
    entry.se_min = interphase.entry->se_min;
    entry.x_um = interphase.place_um.x;
    entry.y_um = interphase.place_um.y;
    entry.along_um = place.along;
    entry.across_um = place.across;
    entry.timing = Timing::with_front;
    entries.entries.push_back(entry);
  }
  records.put(std::move(entries));
}

Slowness slowness_of(const Scene& scene) {
  const double slowness = 1 / scene.speed_um_per_min;
  return {slowness, 0.05 * slowness, scene.speed_um_per_min, 0.91 * scene.speed_um_per_min,
          1.11 * scene.speed_um_per_min};
}

Front front_of(const Scene& scene, int wave, bool left) {
  Front front;
  front.origin = 1;
  front.direction = left ? "left" : "right";
  front.from_um = scene.origin_um;
  front.to_um = left ? 0 : scene.length_um;
  front.from_min = entry_min(scene, {scene.origin_um, 0}, wave);
  front.to_min = entry_min(scene, {front.to_um, 0}, wave);
  front.nuclei = 5;
  front.slowness = slowness_of(scene);
  return front;
}

Origin origin_of(const Scene& scene, const WaveEntry& leader, double probability, int number) {
  Origin origin;
  origin.number = number;
  origin.claimed = number == 1;
  origin.probability = probability;
  origin.nucleus = leader.nucleus;
  origin.x_um = leader.x_um;
  origin.y_um = leader.y_um;
  origin.along_um = leader.along_um;
  origin.across_um = leader.across_um;
  origin.position_se_um = scene.spacing_um / 4;
  origin.entry_min = leader.time_min;
  if (number > 1) origin.prominence_min = 0.4;
  origin.basin_nuclei = 5;
  return origin;
}

Wave wave_of(const Scene& scene, const std::vector<WaveEntry>& entries, int number) {
  Wave wave;
  wave.number = wave.cycle = number;
  for (std::size_t i = 0; i < entries.size(); ++i)
    if (entries[i].wave == number) wave.entries.push_back(static_cast<int>(i));
  const auto earlier = [&](int left, int right) {
    return entries[static_cast<std::size_t>(left)].time_min <
           entries[static_cast<std::size_t>(right)].time_min;
  };
  if (wave.entries.empty()) return wave;
  const auto [first, last] = std::minmax_element(wave.entries.begin(), wave.entries.end(), earlier);
  const auto& leader = entries[static_cast<std::size_t>(*first)];
  wave.start_min = leader.time_min;
  wave.end_min = entries[static_cast<std::size_t>(*last)].time_min;
  if (number > 1) wave.period_min = scene.period_min;
  wave.fate = Fate::confirmed;
  wave.slowness = slowness_of(scene);
  wave.answer = Answer::single;
  wave.site = Site::interior;
  wave.fronts = {front_of(scene, number - 1, true), front_of(scene, number - 1, false)};
  wave.origins = {
      origin_of(scene, leader, 0.97, 1),
      origin_of(scene, entries[static_cast<std::size_t>(wave.entries.back())], 0.04, 2)};
  wave.jitter_min = 0.3;
  return wave;
}

void put_waves(const Scene& scene, RecordStore& records) {
  const auto& entries = records.get<WaveEntries>().entries;
  Waves waves;
  for (int number = 1; number <= scene.waves; ++number) {
    auto wave = wave_of(scene, entries, number);
    if (!wave.entries.empty()) waves.waves.push_back(std::move(wave));
  }
  records.put(std::move(waves));
  Territories territories;
  territories.nearest_um.assign(places_of(scene).size(), scene.spacing_um);
  territories.territory_um2.assign(places_of(scene).size(), scene.spacing_um * scene.width_um);
  records.put(std::move(territories));
}

/// The aperture sees the loss spread within a minute.
void put_apertures(RecordStore& records) {
  ApertureTraces apertures;
  for (const auto& nucleus : records.get<Nuclei>().nuclei) {
    ApertureTrace trace;
    trace.radius_um = radius_um;
    for (const auto& point : nucleus.points) {
      trace.frame.push_back(point.frame);
      trace.time_min.push_back(point.time_min);
      trace.signal.push_back(0.9 * point.brightness + 12 * std::sin(point.time_min * 7.0));
      trace.variance.push_back(100);
    }
    apertures.traces.push_back(std::move(trace));
  }
  records.put(std::move(apertures));
  CameraModel camera;
  camera.dark_offset_counts = 100;
  camera.offset_given = true;
  records.put(camera);
}

}  // namespace

RecordStore nuclei_only_records_of(const Scene& scene, const std::filesystem::path& work_file) {
  RecordStore records;
  records.put(film_of(scene));
  records.put(tube_of(scene));
  put_nuclei(scene, records);
  put_drift(scene, records);
  if (!work_file.empty()) put_reduced_film(scene, work_file, records);
  return records;
}

RecordStore records_of(const Scene& scene, const std::filesystem::path& work_file) {
  auto records = nuclei_only_records_of(scene, work_file);
  put_interphases(scene, records);
  put_entries(scene, records);
  put_waves(scene, records);
  put_apertures(records);
  return records;
}

}  // namespace wavefount::fake
