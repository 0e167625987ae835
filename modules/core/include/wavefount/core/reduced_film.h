#pragma once

#include <cstdint>
#include <filesystem>

#include "wavefount/core/image.h"

namespace wavefount {

/// The whole film, reduced and cropped to the tubes, kept in a work file on disk, so that a
/// nucleus' place can be measured before it forms and after it empties without decoding the film
/// again. Frames may be written from many threads at once; reading starts after the last was
/// written.
class ReducedFilm {
 public:
  static constexpr const char* record_name = "reduced-film";

  /// `factor`: full-size pixels a side of a reduced pixel. `left`, `top`: full-size pixel where the
  /// crop starts. `width`, `height`: reduced pixels. Values from `lowest` to `highest` counts are
  /// stored in 16 bit, linearly; a reduced pixel is a mean, so its steps must be finer than counts.
  /// Throws Problem when the file cannot be made (folder not writable, disk full).
  ReducedFilm(const std::filesystem::path& file, int frames, int factor, int left, int top,
              int width, int height, double lowest, double highest);
  ~ReducedFilm();
  ReducedFilm(const ReducedFilm&) = delete;
  ReducedFilm& operator=(const ReducedFilm&) = delete;

  int frames() const { return frames_; }
  int factor() const { return factor_; }
  int left() const { return left_; }
  int top() const { return top_; }
  int width() const { return width_; }
  int height() const { return height_; }

  /// `image` has exactly width() × height() pixels. Throws Problem when the disk is full.
  /// Const: frame steps see the record so, and only the file changes.
  void write(int frame, const Image& image) const;
  /// A frame as counts; a frame never written reads as `lowest` everywhere.
  ImagePointer read(int frame) const;

 private:
  std::filesystem::path file_;
  int descriptor_ = -1;
  int frames_, factor_, left_, top_, width_, height_;
  double lowest_, counts_per_step_;
};

}  // namespace wavefount
