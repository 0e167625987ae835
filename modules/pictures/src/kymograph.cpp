#include "wavefount/pictures/kymograph.h"

#include <algorithm>
#include <cmath>
#include <cstdint>

#include "scene_of.h"
#include "wavefount/core/reduced_film.h"
#include "wavefount/core/robust.h"

namespace wavefount {
namespace {

constexpr int most_columns = 1200;
constexpr double dark_share = 0.1;
/// With fewer, the darkest tenth is no ground but one frame's noise.
constexpr std::size_t fewest_frames_for_ground = 10;

struct Pixel {
  int x = 0, y = 0, column = 0;
};

int columns_of(const Tube& tube, const ReducedFilm& film, double pixel_um) {
  const double pixels = tube.length_um / (film.factor() * pixel_um);
  return std::clamp(static_cast<int>(pixels), 1, most_columns);
}

/// The reduced pixels inside the tube and where along it they lie.
std::vector<Pixel> pixels_of(const Tube& tube, const ReducedFilm& film, double pixel_um,
                             int columns) {
  std::vector<Pixel> pixels;
  const double centre = (film.factor() - 1) / 2.0;
  for (int y = 0; y < film.height(); ++y) {
    for (int x = 0; x < film.width(); ++x) {
      const auto place = tube.place({(film.left() + x * film.factor() + centre) * pixel_um,
                                     (film.top() + y * film.factor() + centre) * pixel_um});
      if (std::abs(place.across_um) > tube.width_um / 2) continue;
      const double share = place.along_um / tube.length_um;
      if (share >= 0 && share < 1) pixels.push_back({x, y, static_cast<int>(share * columns)});
    }
  }
  return pixels;
}

/// Frames evenly spread in time, rising.
std::vector<int> spread_frames(const FilmDescription& film, int available, int most) {
  std::vector<int> frames;
  const int count = std::min(available, static_cast<int>(film.times_min.size()));
  if (count == 0) return frames;
  const double last_min = film.times_min[static_cast<std::size_t>(count - 1)];
  int frame = 0;
  for (int row = 0; row < most; ++row) {
    const double time_min = most > 1 ? last_min * row / (most - 1) : 0;
    const auto time = [&](int at) { return film.times_min[static_cast<std::size_t>(at)]; };
    while (frame + 1 < count && time(frame + 1) - time_min <= time_min - time(frame)) ++frame;
    if (frames.empty() || frames.back() != frame) frames.push_back(frame);
  }
  return frames;
}

void add_row(const ReducedFilm& film, const std::vector<Pixel>& pixels, int frame, Point drift_px,
             Kymograph& kymograph) {
  const auto image = film.read(frame);
  const float* values = image->GetBufferPointer();
  const int shift_x = static_cast<int>(std::lround(drift_px.x / film.factor()));
  const int shift_y = static_cast<int>(std::lround(drift_px.y / film.factor()));
  const auto columns = static_cast<std::size_t>(kymograph.columns);
  std::vector<float> sum(columns, 0), count(columns, 0);
  for (const auto& pixel : pixels) {
    const int x = pixel.x + shift_x;
    const int y = pixel.y + shift_y;
    if (x < 0 || y < 0 || x >= film.width() || y >= film.height()) continue;
    sum[static_cast<std::size_t>(pixel.column)] += values[y * film.width() + x];
    count[static_cast<std::size_t>(pixel.column)] += 1;
  }
  for (std::size_t i = 0; i < columns; ++i)
    kymograph.light.push_back(count[i] > 0 ? sum[i] / count[i] : -1);
}

}  // namespace

Kymograph kymograph_of(const RecordStore& records, int most_frames) {
  const auto* reduced = records.peek<ReducedFilm>();
  const auto& film = records.get<FilmDescription>();
  if (!reduced) return {};
  const auto tube = tube_or_field(records);
  Kymograph kymograph;
  kymograph.columns = columns_of(tube, *reduced, pixel_um_of(film));
  kymograph.frames = spread_frames(film, reduced->frames(), most_frames);
  const auto pixels = pixels_of(tube, *reduced, pixel_um_of(film), kymograph.columns);
  for (const int frame : kymograph.frames)
    add_row(*reduced, pixels, frame, drift_px_of(records, frame), kymograph);
  return kymograph;
}

void remove_standing_light(Kymograph& kymograph) {
  if (kymograph.frames.size() < fewest_frames_for_ground) return;
  const auto columns = static_cast<std::size_t>(kymograph.columns);
  for (std::size_t column = 0; column < columns; ++column) {
    std::vector<double> seen;
    for (std::size_t row = 0; row < kymograph.frames.size(); ++row)
      if (kymograph.light[row * columns + column] >= 0)
        seen.push_back(kymograph.light[row * columns + column]);
    const auto ground = static_cast<float>(quantile(std::move(seen), dark_share));
    for (std::size_t row = 0; row < kymograph.frames.size(); ++row) {
      float& light = kymograph.light[row * columns + column];
      if (light >= 0) light = std::max(light - ground, 0.0F);
    }
  }
}

}  // namespace wavefount
