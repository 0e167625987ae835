#include <algorithm>
#include <cmath>

#include "wavefount/acquisition/tiff_writer.h"
#include "wavefount/core/problem.h"
#include "wavefount/synthetic/truth.h"

namespace wavefount {
namespace {

constexpr int most_labels = 65535;

struct Page {
  int width, height;
  std::vector<std::uint16_t> labels;
};

void draw(const Scene& scene, const SceneNucleus& nucleus, const SceneLife& life, int frame,
          Page& page) {
  const double time = scene.times_min[static_cast<std::size_t>(frame)];
  const auto centre = life.centre_um(time);
  const auto drift = scene.drift_um(frame);
  const double cx = (centre.x + drift.x) / scene.pixel_um;
  const double cy = (centre.y + drift.y) / scene.pixel_um;
  const double radius = life.radius_um(time) / scene.pixel_um;
  const double reach = radius * (1 + nucleus.elongation + nucleus.lobes);
  const auto low = [&](double middle) {
    return std::max(0, static_cast<int>(std::floor(middle - reach)));
  };
  const auto high = [&](double middle, int size) {
    return std::min(size - 1, static_cast<int>(std::ceil(middle + reach)));
  };
  for (int y = low(cy); y <= high(cy, page.height); ++y)
    for (int x = low(cx); x <= high(cx, page.width); ++x) {
      const double distance = std::hypot(x - cx, y - cy);
      if (distance <= radius * nucleus.outline(std::atan2(y - cy, x - cx)))
        page.labels[static_cast<std::size_t>(y) * static_cast<std::size_t>(page.width) +
                    static_cast<std::size_t>(x)] = static_cast<std::uint16_t>(nucleus.number + 1);
    }
}

Page page_of(const Scene& scene, int frame) {
  Page page{scene.width, scene.height, {}};
  page.labels.resize(static_cast<std::size_t>(scene.width) *
                     static_cast<std::size_t>(scene.height));
  for (const auto& nucleus : scene.nuclei)
    for (const auto& life : nucleus.lives)
      if (showing(scene, life, frame) == Showing::yes) draw(scene, nucleus, life, frame, page);
  return page;
}

}  // namespace

void write_truth_labels(const Scene& scene, const std::filesystem::path& truth) {
  if (scene.nuclei.size() >= most_labels)
    throw Problem("scene " + scene.name + " has too many nuclei for 16-bit labels.");
  TiffLayout layout;
  layout.compression = TiffCompression::deflate;
  TiffWriter writer(truth / scene.name / "labels.tif", layout);
  for (int frame = 0; frame < scene.frames(); ++frame)
    writer.write(page_of(scene, frame).labels.data(), scene.width, scene.height);
  writer.commit();
}

}  // namespace wavefount
