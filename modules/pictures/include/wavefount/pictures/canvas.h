#pragma once

#include <cairo.h>

#include <filesystem>
#include <memory>
#include <string>

#include "wavefount/core/film.h"
#include "wavefount/pictures/colour.h"

namespace wavefount {

/// Where a text stands against the point it is given.
enum class Anchor { start, middle, end };

/// A picture in memory, in pixels from the top left; white at first.
class Canvas {
 public:
  Canvas(int width, int height);

  int width() const { return width_; }
  int height() const { return height_; }
  cairo_t* cairo() const { return cairo_.get(); }

  void set(const Colour& colour, double opacity = 1);
  void line(Point from, Point to, double thickness);
  /// Any bytes; what is not UTF-8 is replaced. `y` is the base line.
  void text(Point at, const std::string& words, double size, Anchor anchor = Anchor::start,
            bool bold = false);
  /// Turned by a quarter, reading upwards; `at` is the middle of its base line.
  void text_upwards(Point at, const std::string& words, double size);
  /// With a soft rim of the other lightness, to be read on any ground.
  void text_on_picture(Point at, const std::string& words, double size, const Colour& colour,
                       Anchor anchor = Anchor::start);
  double text_width(const std::string& words, double size, bool bold = false);
  /// The text, its end replaced by an ellipsis where it is wider than `width`.
  std::string fitted(const std::string& words, double size, double width, bool bold = false);
  void disc(Point centre, double radius, const Colour& fill, const Colour& rim, double thickness);
  /// Outline of a star of five points, to be filled or stroked.
  void star_path(Point centre, double radius);

  /// Throws Problem when the file cannot be written.
  void write_png(const std::filesystem::path& file) const;

 private:
  void choose_font(double size, bool bold);

  struct Destroyer {
    void operator()(cairo_t* cairo) const { cairo_destroy(cairo); }
    void operator()(cairo_surface_t* surface) const { cairo_surface_destroy(surface); }
  };
  int width_, height_;
  std::unique_ptr<cairo_surface_t, Destroyer> surface_;
  std::unique_ptr<cairo_t, Destroyer> cairo_;
};

/// Colours that all pictures share.
namespace palette {
extern const Colour ink, grey, faint, ground, white, mark, second_mark, star, glass;
}

}  // namespace wavefount
