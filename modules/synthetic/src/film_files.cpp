#include "wavefount/synthetic/film_files.h"

#include <algorithm>
#include <deque>
#include <fstream>
#include <future>
#include <vector>

#include "wavefount/acquisition/ome_writer.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"
#include "wavefount/synthetic/render.h"

namespace wavefount {
namespace {

using Counts = std::vector<std::uint16_t>;

Counts counts_of(const Image& image) {
  const float* pixels = image.GetBufferPointer();
  const auto size =
      static_cast<std::size_t>(image_width(image)) * static_cast<std::size_t>(image_height(image));
  Counts counts(size);
  std::transform(pixels, pixels + size, counts.begin(),
                 [](float value) { return static_cast<std::uint16_t>(value); });
  return counts;
}

/// Frames in order, some rendered ahead on other threads while the first is written.
class FramesAhead {
 public:
  FramesAhead(const Scene& scene, int threads)
      : renderer_(scene), frames_(scene.frames()), ahead_(std::max(1, threads)) {}

  template <typename Write>
  void each(Write write) {
    std::deque<std::future<Counts>> waiting;
    for (int next = 0; next < frames_ || !waiting.empty();) {
      while (next < frames_ && static_cast<int>(waiting.size()) < ahead_) {
        waiting.push_back(std::async(std::launch::async, [this, frame = next] {
          return counts_of(*renderer_.frame(frame));
        }));
        ++next;
      }
      const Counts counts = waiting.front().get();
      waiting.pop_front();
      write(counts);
    }
  }

 private:
  SceneRenderer renderer_;
  int frames_;
  int ahead_;
};

TiffLayout layout_of(const Scene& scene, const FilmFiles& files) {
  TiffLayout layout;
  layout.format = scene.camera.bit_depth <= 8 ? PixelFormat::unsigned8 : PixelFormat::unsigned16;
  layout.compression = files.compression;
  layout.predictor = files.compression != TiffCompression::none;
  layout.level = 1;
  const auto bytes = static_cast<double>(scene.width) * scene.height * 2 * scene.frames();
  layout.big_tiff = bytes > 3.9e9;
  return layout;
}

void write_page(TiffWriter& writer, const Counts& counts, const Scene& scene) {
  if (scene.camera.bit_depth > 8) {
    writer.write(counts.data(), scene.width, scene.height);
    return;
  }
  std::vector<std::uint8_t> bytes(counts.begin(), counts.end());
  writer.write(bytes.data(), scene.width, scene.height);
}

std::string ome_description(const Scene& scene, const std::string& file_name) {
  OmeImage image;
  image.name = scene.name;
  image.width = scene.width;
  image.height = scene.height;
  image.frames = scene.frames();
  image.format = scene.camera.bit_depth <= 8 ? PixelFormat::unsigned8 : PixelFormat::unsigned16;
  image.significant_bits = scene.camera.bit_depth;
  image.pixel_um = scene.pixel_um;
  image.delta_min = scene.times_min;
  return ome_xml(file_name, {image});
}

void write_sidecar(const Scene& scene, const std::filesystem::path& file) {
  std::ofstream out(file, std::ios::binary);
  std::vector<std::string> times;
  for (const double time : scene.times_min) times.push_back(number_text(time));
  out << "pixel_size_um: " << number_text(scene.pixel_um) << "\n"
      << "times_min: [" << joined(times, ", ") << "]\n"
      << "channels: [reporter]\n"
      << "optics: " << (scene.optics.optics == Optics::sectioned ? "sectioned" : "widefield")
      << "\n"
      << "bit_depth: " << scene.camera.bit_depth << "\n"
      << "gain_electrons_per_count: " << number_text(scene.camera.gain_electrons_per_count) << "\n"
      << "read_noise_electrons: " << number_text(scene.camera.read_noise_electrons) << "\n"
      << "dark_offset_counts: " << number_text(scene.camera.dark_offset_counts) << "\n";
  out.close();
  if (!out) throw Problem("cannot write " + file.string() + "; is the disk full?");
}

void write_one_file(const Scene& scene, const std::filesystem::path& file, const FilmFiles& files,
                    const std::string& description) {
  auto layout = layout_of(scene, files);
  layout.description = description;
  TiffWriter writer(file, layout);
  FramesAhead(scene, files.threads).each([&](const Counts& counts) {
    write_page(writer, counts, scene);
  });
  writer.commit();
}

void write_frame_folder(const Scene& scene, const std::filesystem::path& folder,
                        const FilmFiles& files) {
  std::filesystem::create_directories(folder);
  int number = 0;
  FramesAhead(scene, files.threads).each([&](const Counts& counts) {
    TiffWriter writer(folder / ("frame-" + std::to_string(number++) + ".tif"),
                      layout_of(scene, files));
    write_page(writer, counts, scene);
    writer.commit();
  });
}

}  // namespace

void write_film(const Scene& scene, const std::filesystem::path& folder, const FilmFiles& files) {
  std::filesystem::create_directories(folder);
  if (files.format == FilmFormat::ome_tiff) {
    const auto file = folder / (scene.name + ".ome.tif");
    write_one_file(scene, file, files, ome_description(scene, file.filename().string()));
    return;
  }
  if (files.format == FilmFormat::tiff_with_sidecar)
    write_one_file(scene, folder / (scene.name + ".tif"), files, "");
  else
    write_frame_folder(scene, folder / scene.name, files);
  write_sidecar(scene, folder / (scene.name + ".yaml"));
}

}  // namespace wavefount
