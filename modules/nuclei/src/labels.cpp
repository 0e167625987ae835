#include "wavefount/nuclei/labels.h"

#include <algorithm>
#include <limits>

#include "wavefount/acquisition/tiff_writer.h"

namespace wavefount::nuclei {
namespace {

/// Classic TIFF addresses 4 GiB; labels compress a hundredfold, but a hostile film need not.
constexpr double big_tiff_from_bytes = 3e9;

template <class Pixel>
void write_pages(TiffWriter& writer, const LabelPainter& painter, int frames, int width,
                 int height) {
  for (int frame = 0; frame < frames; ++frame)
    writer.write(painter.page<Pixel>(frame).data(), width, height);
}

}  // namespace

LabelPainter::LabelPainter(const FilmDescription& film, const Observations& observations,
                           const Nuclei& nuclei)
    : film_(film),
      observations_(observations),
      by_frame_(static_cast<std::size_t>(std::max(film.frames, 0))) {
  for (const Nucleus& nucleus : nuclei.nuclei) {
    const auto label = static_cast<std::uint32_t>(nucleus.id) + 1;
    for (const TracePoint& point : nucleus.points) {
      if (!point.found || point.sighting < 0) continue;
      if (point.frame < 0 || point.frame >= film.frames) continue;
      by_frame_[static_cast<std::size_t>(point.frame)].push_back({point.sighting, label});
      highest_ = std::max(highest_, label);
    }
  }
}

template <class Pixel>
std::vector<Pixel> LabelPainter::page(int frame) const {
  const auto width = static_cast<std::size_t>(film_.width);
  const auto height = static_cast<std::size_t>(film_.height);
  std::vector<Pixel> pixels(width * height, 0);
  const auto index = static_cast<std::size_t>(frame);
  if (index >= by_frame_.size() || index >= observations_.frames.size()) return pixels;
  const auto& sightings = observations_.frames[index].sightings;
  for (const Painted& painted : by_frame_[index]) {
    if (static_cast<std::size_t>(painted.sighting) >= sightings.size()) continue;
    for (const Run& run : sightings[static_cast<std::size_t>(painted.sighting)].runs) {
      if (run.y >= height) continue;
      const std::size_t end = std::min<std::size_t>(run.x1, width);
      for (std::size_t x = run.x0; x < end; ++x)
        pixels[run.y * width + x] = static_cast<Pixel>(painted.label);
    }
  }
  return pixels;
}

template std::vector<std::uint16_t> LabelPainter::page(int frame) const;
template std::vector<std::uint32_t> LabelPainter::page(int frame) const;

void write_labels(const std::filesystem::path& file, const LabelPainter& painter, int frames,
                  int width, int height) {
  const bool wide = painter.highest_label() > std::numeric_limits<std::uint16_t>::max();
  TiffLayout layout;
  layout.format = wide ? wavefount::PixelFormat::unsigned32 : wavefount::PixelFormat::unsigned16;
  layout.compression = TiffCompression::deflate;
  layout.big_tiff =
      static_cast<double>(frames) * width * height * (wide ? 4 : 2) > 100 * big_tiff_from_bytes;
  TiffWriter writer(file, layout);
  if (wide)
    write_pages<std::uint32_t>(writer, painter, frames, width, height);
  else
    write_pages<std::uint16_t>(writer, painter, frames, width, height);
  writer.commit();
}

}  // namespace wavefount::nuclei
