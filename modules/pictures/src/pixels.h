#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "wavefount/core/wave.h"
#include "wavefount/pictures/plot.h"

namespace wavefount {

/// Pixels to be painted into a box of a canvas.
class PixelImage {
 public:
  PixelImage(int width, int height);
  void set(int x, int y, std::uint32_t pixel) {
    pixels_[static_cast<std::size_t>(y) * static_cast<std::size_t>(width_) +
            static_cast<std::size_t>(x)] = pixel;
  }
  /// Stretched over the box, smoothly.
  void paint(Canvas& canvas, const Box& box);

 private:
  int width_, height_;
  std::vector<std::uint32_t> pixels_;
};

/// The mark of an origin: a filled star where claimed, a ring where a candidate.
void draw_origin(Canvas& canvas, Point at, bool claimed, double radius);
/// Whether a picture shows it: candidates of next to no probability stay in the table.
bool worth_a_mark(const Origin& origin);
/// Two decimals, and never a made-up certainty: "> 0.99" above 0.995.
std::string probability_text(double probability);

}  // namespace wavefount
