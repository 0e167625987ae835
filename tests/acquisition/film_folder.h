#pragma once

#include <cmath>
#include <memory>
#include <string>
#include <vector>

#include "wavefount/acquisition/ome_writer.h"
#include "wavefount/acquisition/open_film.h"
#include "wavefount/acquisition/tiff_writer.h"
#include "work_folder.h"

namespace wavefount::testing {

constexpr int film_width = 75;
constexpr int film_height = 42;

/// Value of a pixel in a page of the test films: all of 12 bits come up, and no two pages agree.
inline int pixel_value(int page, int x, int y) {
  return (page * 517 + x * 53 + y * 211) % 4096;
}

template <class Sample>
std::vector<Sample> page_of(int page, int width = film_width, int height = film_height) {
  std::vector<Sample> pixels;
  for (int y = 0; y < height; ++y) {
    for (int x = 0; x < width; ++x) {
      const int value = pixel_value(page, x, y);
      pixels.push_back(static_cast<Sample>(sizeof(Sample) == 1 ? value % 256 : value));
    }
  }
  return pixels;
}

/// A folder in which tests write films and open them again.
class FilmFolder : public WorkFolder {
 protected:
  std::filesystem::path write_film(const std::string& name, int pages,
                                   const TiffLayout& layout = {}, int first_page = 0) const {
    std::filesystem::create_directories(path(name).parent_path());
    TiffWriter writer(path(name), layout);
    for (int i = 0; i < pages; ++i) write_page(writer, layout.format, first_page + i);
    writer.commit();
    return path(name);
  }

  static void write_page(TiffWriter& writer, PixelFormat format, int page,
                         int height = film_height) {
    switch (format) {
      case PixelFormat::unsigned8:
        writer.write(page_of<std::uint8_t>(page, film_width, height).data(), film_width, height);
        break;
      case PixelFormat::packed12:
      case PixelFormat::unsigned16:
        writer.write(page_of<std::uint16_t>(page, film_width, height).data(), film_width, height);
        break;
      case PixelFormat::unsigned32:
        writer.write(page_of<std::uint32_t>(page, film_width, height).data(), film_width, height);
        break;
      case PixelFormat::float32:
        writer.write(page_of<float>(page, film_width, height).data(), film_width, height);
        break;
    }
  }

  /// One film of one channel with metadata of its own.
  std::filesystem::path write_ome_film(const std::string& name, int pages,
                                       TiffLayout layout = {}) const {
    OmeImage image = ome_image(pages);
    image.format = layout.format;
    layout.description = ome_xml(name, {image});
    return write_film(name, pages, layout);
  }

  static OmeImage ome_image(int frames) {
    OmeImage image;
    image.name = "film";
    image.width = film_width;
    image.height = film_height;
    image.frames = frames;
    image.pixel_um = 0.65;
    image.interval_min = 2;
    return image;
  }

  void write_sidecar(const std::string& name, const std::string& more = "") const {
    write_text(name + ".yaml", "pixel_size_um: 0.5\nframe_interval_min: 1.5\n" + more);
  }

  FoundFilm found(const std::string& name) const {
    for (const auto& film : list_films(folder_).films) {
      if (film.name == name) return film;
    }
    ADD_FAILURE() << "no film " << name;
    return {};
  }

  std::shared_ptr<const FrameSource> open(const std::string& name,
                                          const ChannelRoles& roles = {}) const {
    return open_film(found(name), roles);
  }

  std::string complaint_on_opening(const std::string& name, const ChannelRoles& roles = {}) const {
    return complaint([&] { open(name, roles); });
  }

  static void expect_page(const Image& image, int page, int modulus = 4096) {
    ASSERT_EQ(image_width(image), film_width);
    ASSERT_EQ(image_height(image), film_height);
    const float* pixels = image.GetBufferPointer();
    int wrong = 0;
    for (int y = 0; y < film_height; ++y) {
      for (int x = 0; x < film_width; ++x) {
        const auto expected = static_cast<float>(pixel_value(page, x, y) % modulus);
        if (pixels[y * film_width + x] != expected) ++wrong;
      }
    }
    EXPECT_EQ(wrong, 0) << "page " << page;
  }
};

inline bool any_contains(const std::vector<std::string>& sentences, const std::string& part) {
  for (const auto& sentence : sentences) {
    if (sentence.find(part) != std::string::npos) return true;
  }
  return false;
}

}  // namespace wavefount::testing
