#include "wavefount/pictures/canvas.h"

#include <cmath>
#include <numbers>

#include "png_file.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace palette {

// Lightness differs between any two, so that they are told apart in greyscale print.
const Colour ink = srgb_of(lab_of(0.27, 0.02, 250));
const Colour grey = srgb_of(lab_of(0.55, 0.015, 250));
const Colour faint = srgb_of(lab_of(0.88, 0.01, 250));
const Colour ground = srgb_of(lab_of(0.965, 0.006, 230));
const Colour white = {1, 1, 1};
const Colour mark = srgb_of(lab_of(0.72, 0.17, 55));
const Colour second_mark = srgb_of(lab_of(0.48, 0.11, 245));
const Colour star = srgb_of(lab_of(0.90, 0.17, 100));
const Colour glass = srgb_of(lab_of(0.70, 0.03, 230));

}  // namespace palette

Canvas::Canvas(int width, int height)
    : width_(width),
      height_(height),
      surface_(cairo_image_surface_create(CAIRO_FORMAT_RGB24, width, height)),
      cairo_(cairo_create(surface_.get())) {
  if (cairo_status(cairo_.get()) != CAIRO_STATUS_SUCCESS)
    throw Problem("A picture of " + std::to_string(width) + " × " + std::to_string(height) +
                  " pixels does not fit into memory.");
  set(palette::white);
  cairo_paint(cairo_.get());
  cairo_set_line_join(cairo_.get(), CAIRO_LINE_JOIN_ROUND);
}

void Canvas::set(const Colour& colour, double opacity) {
  cairo_set_source_rgba(cairo_.get(), colour.red, colour.green, colour.blue, opacity);
}

void Canvas::line(Point from, Point to, double thickness) {
  cairo_set_line_width(cairo_.get(), thickness);
  cairo_move_to(cairo_.get(), from.x, from.y);
  cairo_line_to(cairo_.get(), to.x, to.y);
  cairo_stroke(cairo_.get());
}

void Canvas::choose_font(double size, bool bold) {
  cairo_select_font_face(cairo_.get(), "DejaVu Sans", CAIRO_FONT_SLANT_NORMAL,
                         bold ? CAIRO_FONT_WEIGHT_BOLD : CAIRO_FONT_WEIGHT_NORMAL);
  cairo_set_font_size(cairo_.get(), size);
}

double Canvas::text_width(const std::string& words, double size, bool bold) {
  choose_font(size, bold);
  cairo_text_extents_t extents;
  cairo_text_extents(cairo_.get(), valid_utf8(words).c_str(), &extents);
  return extents.x_advance;
}

std::string Canvas::fitted(const std::string& words, double size, double width, bool bold) {
  std::string text = valid_utf8(words);
  for (char& c : text)
    if (static_cast<unsigned char>(c) < 0x20) c = ' ';
  if (text_width(text, size, bold) <= width) return text;
  while (!text.empty() && text_width(text + "…", size, bold) > width) {
    do {
      text.pop_back();
    } while (!text.empty() && (static_cast<unsigned char>(text.back()) & 0x80) != 0 &&
             (static_cast<unsigned char>(text.back()) & 0xC0) != 0xC0);
    text = valid_utf8(text) == text ? text : text.substr(0, text.size() - 1);
  }
  return text + "…";
}

void Canvas::text(Point at, const std::string& words, double size, Anchor anchor, bool bold) {
  const double width = text_width(words, size, bold);
  const double shift = anchor == Anchor::start ? 0 : anchor == Anchor::middle ? width / 2 : width;
  cairo_move_to(cairo_.get(), at.x - shift, at.y);
  cairo_show_text(cairo_.get(), valid_utf8(words).c_str());
  cairo_new_path(cairo_.get());
}

void Canvas::text_upwards(Point at, const std::string& words, double size) {
  cairo_save(cairo_.get());
  cairo_translate(cairo_.get(), at.x, at.y);
  cairo_rotate(cairo_.get(), -std::numbers::pi / 2);
  text({0, 0}, words, size, Anchor::middle);
  cairo_restore(cairo_.get());
}

void Canvas::text_on_picture(Point at, const std::string& words, double size, const Colour& colour,
                             Anchor anchor) {
  const double width = text_width(words, size, true);
  const double shift = anchor == Anchor::start ? 0 : anchor == Anchor::middle ? width / 2 : width;
  cairo_move_to(cairo_.get(), at.x - shift, at.y);
  cairo_text_path(cairo_.get(), valid_utf8(words).c_str());
  const double brightness = 0.3 * colour.red + 0.6 * colour.green + 0.1 * colour.blue;
  set(brightness > 0.5 ? palette::ink : palette::white, 0.75);
  cairo_set_line_width(cairo_.get(), size / 5);
  cairo_stroke_preserve(cairo_.get());
  set(colour);
  cairo_fill(cairo_.get());
}

void Canvas::disc(Point centre, double radius, const Colour& fill, const Colour& rim,
                  double thickness) {
  cairo_arc(cairo_.get(), centre.x, centre.y, radius, 0, 2 * std::numbers::pi);
  set(fill);
  cairo_fill_preserve(cairo_.get());
  set(rim);
  cairo_set_line_width(cairo_.get(), thickness);
  cairo_stroke(cairo_.get());
}

void Canvas::star_path(Point centre, double radius) {
  constexpr int corners = 10;
  constexpr double waist = 0.45;  // of the radius, between two points
  cairo_new_path(cairo_.get());
  for (int i = 0; i < corners; ++i) {
    const double angle = std::numbers::pi * (2.0 * i / corners - 0.5);
    const double reach = i % 2 == 0 ? radius : waist * radius;
    cairo_line_to(cairo_.get(), centre.x + reach * std::cos(angle),
                  centre.y + reach * std::sin(angle));
  }
  cairo_close_path(cairo_.get());
}

void Canvas::write_png(const std::filesystem::path& file) const {
  cairo_surface_flush(surface_.get());
  write_png_file(file, cairo_image_surface_get_data(surface_.get()), width_, height_,
                 cairo_image_surface_get_stride(surface_.get()));
}

}  // namespace wavefount
