#pragma once

#include <cstdint>
#include <filesystem>
#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/observations.h"

namespace wavefount::nuclei {

/// Label images of a film: 0 background, `Nucleus::id` + 1 inside the outlines.
class LabelPainter {
 public:
  LabelPainter(const FilmDescription& film, const Observations& observations, const Nuclei& nuclei);

  std::uint32_t highest_label() const { return highest_; }
  /// One page, row by row; empty where nothing was found. Pixel is the page's integer type.
  template <class Pixel>
  std::vector<Pixel> page(int frame) const;

 private:
  struct Painted {
    int sighting = 0;
    std::uint32_t label = 0;
  };

  const FilmDescription& film_;
  const Observations& observations_;
  std::vector<std::vector<Painted>> by_frame_;
  std::uint32_t highest_ = 0;
};

/// Writes the pages of all frames as a Deflate TIFF, 16 bit, or 32 where a label needs it. The file
/// gets its name when it is whole. Throws Problem when it cannot be written.
void write_labels(const std::filesystem::path& file, const LabelPainter& painter, int frames,
                  int width, int height);

}  // namespace wavefount::nuclei
