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

/// Beyond this many, pixels are skipped evenly: a column's mean is settled by a hundred.
constexpr int enough_pixels = 80'000;

struct Pixel {
  int x = 0, y = 0;
  float column = 0;  ///< where along the tube its centre lies, in columns
};

int columns_of(const Tube& tube, const ReducedFilm& film, double pixel_um) {
  const double pixels = tube.length_um / (film.factor() * pixel_um);
  return std::clamp(static_cast<int>(pixels), 1, most_columns);
}

/// Places in the tube at every fourth reduced pixel, and in between by interpolation: places change
/// smoothly, and the axis of a bent tube has many pieces.
class PlaceGrid {
 public:
  PlaceGrid(const Tube& tube, const ReducedFilm& film, double pixel_um)
      : nodes_across_(film.width() / step + 2) {
    const double centre = (film.factor() - 1) / 2.0;
    for (int y = 0; y <= film.height() / step + 1; ++y)
      for (int x = 0; x < nodes_across_; ++x)
        nodes_.push_back(tube.place({(film.left() + x * step * film.factor() + centre) * pixel_um,
                                     (film.top() + y * step * film.factor() + centre) * pixel_um}));
  }

  /// along_um and across_um at a reduced pixel.
  Point at(int x, int y) const {
    const auto node = static_cast<std::size_t>(y / step * nodes_across_ + x / step);
    const auto below = node + static_cast<std::size_t>(nodes_across_);
    const double right = double(x % step) / step;
    const double down = double(y % step) / step;
    const auto mixed = [&](double TubePlace::*value) {
      return (1 - down) * ((1 - right) * nodes_[node].*value + right * nodes_[node + 1].*value) +
             down * ((1 - right) * nodes_[below].*value + right * nodes_[below + 1].*value);
    };
    return {mixed(&TubePlace::along_um), mixed(&TubePlace::across_um)};
  }

 private:
  static constexpr int step = 4;
  int nodes_across_;
  std::vector<TubePlace> nodes_;
};

/// The reduced pixels inside the tube and where along it they lie.
std::vector<Pixel> pixels_of(const Tube& tube, const ReducedFilm& film, double pixel_um,
                             int columns) {
  const PlaceGrid grid(tube, film, pixel_um);
  std::vector<Pixel> pixels;
  const int stride = 1 + film.width() * film.height() / enough_pixels;
  for (int y = 0; y < film.height(); ++y) {
    for (int x = y % stride; x < film.width(); x += stride) {
      const auto [along_um, across_um] = grid.at(x, y);
      if (std::abs(across_um) > tube.width_um / 2) continue;
      const double share = along_um / tube.length_um;
      if (share >= 0 && share < 1) pixels.push_back({x, y, static_cast<float>(share * columns)});
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

/// Columns that a shift of one reduced pixel along x and along y moves the light by.
Point columns_a_pixel(const Tube& tube, const ReducedFilm& film, double pixel_um, int columns) {
  const double x = tube.axis_um.back().x - tube.axis_um.front().x;
  const double y = tube.axis_um.back().y - tube.axis_um.front().y;
  const double chord = std::max(std::hypot(x, y), 1e-9);
  const double scale = film.factor() * pixel_um * columns / tube.length_um;
  return {scale * x / chord, scale * y / chord};
}

/// One frame's mean across the tube. Drift is followed in whole reduced pixels; what is left of it
/// moves the light along the tube, shared between two columns.
void add_row(const ReducedFilm& film, const std::vector<Pixel>& pixels, int frame, Point drift_px,
             Point per_pixel, Kymograph& kymograph) {
  const auto image = film.read(frame);
  const float* values = image->GetBufferPointer();
  const Point drift = {drift_px.x / film.factor(), drift_px.y / film.factor()};
  const int shift_x = static_cast<int>(std::lround(drift.x));
  const int shift_y = static_cast<int>(std::lround(drift.y));
  const auto rest =
      static_cast<float>((drift.x - shift_x) * per_pixel.x + (drift.y - shift_y) * per_pixel.y);
  // One column beyond each end takes what falls outside.
  const auto columns = static_cast<std::size_t>(kymograph.columns);
  std::vector<float> sum(columns + 2, 0), weight(columns + 2, 0);
  for (const auto& pixel : pixels) {
    const int x = pixel.x + shift_x;
    const int y = pixel.y + shift_y;
    if (x < 0 || y < 0 || x >= film.width() || y >= film.height()) continue;
    const float at =
        std::clamp(pixel.column - rest + 0.5F, 0.0F, static_cast<float>(columns) + 0.99F);
    const auto column = static_cast<std::size_t>(at);
    const float later = at - static_cast<float>(column);
    const float value = values[y * film.width() + x];
    sum[column] += (1 - later) * value;
    weight[column] += 1 - later;
    sum[column + 1] += later * value;
    weight[column + 1] += later;
  }
  for (std::size_t i = 1; i <= columns; ++i)
    kymograph.light.push_back(weight[i] > 0 ? sum[i] / weight[i] : -1);
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
  const auto per_pixel = columns_a_pixel(tube, *reduced, pixel_um_of(film), kymograph.columns);
  for (const int frame : kymograph.frames)
    add_row(*reduced, pixels, frame, drift_px_of(records, frame), per_pixel, kymograph);
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
