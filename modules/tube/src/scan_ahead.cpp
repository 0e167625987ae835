#include "wavefount/tube/scan_ahead.h"

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <limits>
#include <string>
#include <utility>
#include <vector>

#include "wavefount/core/problem.h"
#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"
#include "wavefount/tube/binning.h"
#include "wavefount/tube/frame_choice.h"
#include "wavefount/tube/keyframes.h"
#include "wavefount/tube/photon_transfer.h"

namespace wavefount::tube {
namespace {

/// A nucleus is found down to this radius in reduced pixels.
constexpr double smallest_radius_reduced_px = 1.5;
/// Reduced pixels left on the shorter side at least.
constexpr int fewest_reduced_px = 32;
/// More pixels without a finite value than this share spoil a frame.
constexpr double mendable_share = 0.05;
/// A frame with less light above the darkest place than this share of the usual is dark: the lamp
/// was off, the shutter closed.
constexpr double dark_share = 0.1;

std::size_t pixel_count(const Image& image) {
  return static_cast<std::size_t>(image_width(image)) *
         static_cast<std::size_t>(image_height(image));
}

void add_to(Image& sum, const Image& plane) {
  float* to = sum.GetBufferPointer();
  const float* from = plane.GetBufferPointer();
  for (std::size_t i = 0; i < pixel_count(sum); ++i) to[i] += from[i];
}

/// Highest less lowest light, robustly: what there is to see.
double range_of(const Image& image) {
  std::vector<double> values;
  for (std::size_t i = 0; i < pixel_count(image); i += 7)
    values.push_back(image.GetBufferPointer()[i]);
  return quantile(values, 0.99) - quantile(values, 0.01);
}

struct Keyframes {
  std::vector<int> frames;
  std::vector<ImagePointer> images;
  std::vector<NoisePoint> noise;
  std::vector<std::string> unreadable;
};

class Scanner {
 public:
  Scanner(const FrameSource& source, const ScanSettings& settings)
      : film_(source.description()),
        reader_(source.reader()),
        factor_(reduction_factor(film_, settings.smallest_radius_um)),
        saturation_(film_.bit_depth) {}

  Keyframes read(const ScanSettings& settings) {
    Keyframes keys;
    auto chosen = spread_frames(film_, settings.frames);
    const std::size_t every = std::max<std::size_t>(
        1, (chosen.size() + static_cast<std::size_t>(settings.noise_pairs) - 1) /
               static_cast<std::size_t>(settings.noise_pairs));
    for (std::size_t k = 0; k < chosen.size(); ++k) {
      const auto pixels = take(chosen[k], keys);
      if (pixels && k % every == 0) pair_up(*pixels, chosen[k], keys);
    }
    if (!keys.images.empty()) return keys;
    // All that were chosen are of no use: any other frame will do.
    for (int frame = 0; frame < film_.frames && keys.images.empty(); ++frame)
      if (kept_out(film_, frame).empty() &&
          !std::binary_search(chosen.begin(), chosen.end(), frame))
        take(frame, keys);
    return keys;
  }

  int factor() const { return factor_; }
  double saturation() const { return saturation_.saturation() * film_.z_planes; }
  double plane_saturation() const { return saturation_.saturation(); }

 private:
  /// The frame's pixels when it is usable, else null.
  ImagePointer take(int frame, Keyframes& keys) {
    ImagePointer pixels;
    try {
      pixels = read_summed(*reader_, film_, frame);
    } catch (const Problem& problem) {
      keys.unreadable.emplace_back(problem.what());
      return nullptr;
    }
    auto reduced = bin_mean(*pixels, factor_);
    const auto problem = blank_problem(*reduced);
    if (!problem.empty()) {
      keys.unreadable.push_back("Frame " + std::to_string(frame) + ": " + problem);
      return nullptr;
    }
    mend(*reduced);
    if (film_.z_planes == 1) saturation_.add(*pixels);
    keys.frames.push_back(frame);
    keys.images.push_back(reduced);
    return pixels;
  }

  void pair_up(const Image& pixels, int frame, Keyframes& keys) {
    const double limit = film_.bit_depth >= 32
                             ? std::numeric_limits<double>::infinity()
                             : (std::ldexp(1.0, film_.bit_depth) - 1) * film_.z_planes;
    const int next = frame + 1 < film_.frames ? frame + 1 : frame - 1;
    if (next < 0) return add_single(pixels, limit, keys.noise);
    try {
      add_pair(pixels, *read_summed(*reader_, film_, next), limit, keys.noise);
    } catch (const Problem&) {
      add_single(pixels, limit, keys.noise);
    }
  }

  const FilmDescription film_;
  std::unique_ptr<FrameReader> reader_;
  int factor_;
  SaturationFinder saturation_;
};

/// Takes out frames that show next to nothing beside the others.
void drop_dark(Keyframes& keys) {
  std::vector<double> ranges;
  for (const auto& image : keys.images) ranges.push_back(range_of(*image));
  const double usual = median(ranges);
  Keyframes kept;
  for (std::size_t k = 0; k < keys.images.size(); ++k) {
    if (ranges[k] < dark_share * usual) {
      keys.unreadable.push_back("Frame " + std::to_string(keys.frames[k]) +
                                ": it is dark beside the others.");
      continue;
    }
    kept.frames.push_back(keys.frames[k]);
    kept.images.push_back(keys.images[k]);
  }
  keys.frames = std::move(kept.frames);
  keys.images = std::move(kept.images);
}

double darkest_level(const std::vector<ImagePointer>& images) {
  double darkest = std::numeric_limits<double>::infinity();
  for (const auto& image : images) {
    const float* pixels = image->GetBufferPointer();
    std::vector<double> sample(pixels, pixels + pixel_count(*image));
    darkest = std::min(darkest, quantile(std::move(sample), 0.002));
  }
  return darkest;
}

void say_left_out(const Keyframes& keys, Messages& messages) {
  if (keys.unreadable.empty()) return;
  messages.warn(std::to_string(keys.unreadable.size()) +
                " of the frames read ahead were of no use (" + keys.unreadable.front() + ")");
}

}  // namespace

int reduction_factor(const FilmDescription& film, double smallest_radius_um) {
  if (!(film.pixel_um > 0)) return 1;
  const double wanted = smallest_radius_um / film.pixel_um / smallest_radius_reduced_px;
  const int most = std::max(1, std::min(film.width, film.height) / fewest_reduced_px);
  return static_cast<int>(std::clamp(std::floor(wanted), 1.0, static_cast<double>(most)));
}

ImagePointer read_summed(FrameReader& reader, const FilmDescription& film, int frame) {
  auto sum = reader.read(frame, film.reporter, 0);
  for (int z = 1; z < film.z_planes; ++z) add_to(*sum, *reader.read(frame, film.reporter, z));
  return sum;
}

std::string blank_problem(const Image& reduced) {
  const float* pixels = reduced.GetBufferPointer();
  const std::size_t count = pixel_count(reduced);
  std::size_t broken = 0;
  float lowest = std::numeric_limits<float>::max();
  float highest = std::numeric_limits<float>::lowest();
  for (std::size_t i = 0; i < count; ++i) {
    if (!std::isfinite(pixels[i])) {
      ++broken;
      continue;
    }
    lowest = std::min(lowest, pixels[i]);
    highest = std::max(highest, pixels[i]);
  }
  if (static_cast<double>(broken) > mendable_share * static_cast<double>(count))
    return "Many of its pixels are not finite numbers.";
  if (!(highest > lowest)) return "All its pixels have the same value.";
  return {};
}

bool mend(Image& image) {
  float* pixels = image.GetBufferPointer();
  const std::size_t count = pixel_count(image);
  if (std::all_of(pixels, pixels + count, [](float one) { return std::isfinite(one); }))
    return false;
  std::vector<double> finite;
  for (std::size_t i = 0; i < count; ++i)
    if (std::isfinite(pixels[i])) finite.push_back(pixels[i]);
  const auto middle = static_cast<float>(median(std::move(finite)));
  for (std::size_t i = 0; i < count; ++i)
    if (!std::isfinite(pixels[i])) pixels[i] = middle;
  return true;
}

ScanResult scan_ahead(const FrameSource& source, const ScanSettings& settings, Messages& messages) {
  const auto& film = source.description();
  Scanner scanner(source, settings);
  auto keys = scanner.read(settings);
  if (!keys.images.empty()) drop_dark(keys);
  if (keys.images.empty())
    throw Problem("No frame of " + film.name + " is usable" +
                  (keys.unreadable.empty()
                       ? std::string("; the sidecar excludes all of them.")
                       : ": " + keys.unreadable.front() + " Look at the film itself."));
  say_left_out(keys, messages);
  const double reduced_um = std::max(film.pixel_um, 1e-9) * scanner.factor();
  auto aligned = align(keys.images, 2 * settings.largest_radius_um / reduced_um);
  ScanResult result;
  std::vector<std::string> notes;
  result.camera = estimate_camera(keys.noise, film.camera, film.z_planes,
                                  darkest_level(keys.images), scanner.saturation(), notes);
  for (const auto& note : notes) messages.note(note);
  auto& prescan = result.prescan;
  prescan.factor = scanner.factor();
  prescan.frames = std::move(keys.frames);
  prescan.images = std::move(keys.images);
  prescan.median = aligned.median;
  prescan.low = aligned.low;
  for (std::size_t k = 0; k < aligned.x.size(); ++k) {
    prescan.shift_x_px.push_back(aligned.x[k] * prescan.factor);
    prescan.shift_y_px.push_back(aligned.y[k] * prescan.factor);
  }
  return result;
}

}  // namespace wavefount::tube
