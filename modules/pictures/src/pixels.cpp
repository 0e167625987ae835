#include "pixels.h"

#include <numbers>

namespace wavefount {

PixelImage::PixelImage(int width, int height)
    : width_(width),
      height_(height),
      pixels_(static_cast<std::size_t>(width) * static_cast<std::size_t>(height)) {}

void PixelImage::paint(Canvas& canvas, const Box& box) {
  auto* surface =
      cairo_image_surface_create_for_data(reinterpret_cast<unsigned char*>(pixels_.data()),
                                          CAIRO_FORMAT_RGB24, width_, height_, 4 * width_);
  auto* cairo = canvas.cairo();
  cairo_save(cairo);
  cairo_rectangle(cairo, box.x, box.y, box.width, box.height);
  cairo_clip(cairo);
  cairo_translate(cairo, box.x, box.y);
  cairo_scale(cairo, box.width / width_, box.height / height_);
  cairo_set_source_surface(cairo, surface, 0, 0);
  // Without this the picture fades out at its edges.
  cairo_pattern_set_extend(cairo_get_source(cairo), CAIRO_EXTEND_PAD);
  cairo_pattern_set_filter(cairo_get_source(cairo), CAIRO_FILTER_GOOD);
  cairo_paint(cairo);
  cairo_restore(cairo);
  cairo_surface_destroy(surface);
}

void draw_origin(Canvas& canvas, Point at, bool claimed, double radius) {
  auto* cairo = canvas.cairo();
  if (claimed) {
    canvas.star_path(at, radius);
    canvas.set(palette::ink);
    cairo_set_line_width(cairo, 4);
    cairo_stroke_preserve(cairo);
    canvas.set(palette::star);
    cairo_fill(cairo);
    return;
  }
  cairo_new_path(cairo);
  cairo_arc(cairo, at.x, at.y, radius, 0, 2 * std::numbers::pi);
  canvas.set(palette::ink);
  cairo_set_line_width(cairo, 5);
  cairo_stroke_preserve(cairo);
  canvas.set(palette::white);
  cairo_set_line_width(cairo, 2.2);
  cairo_stroke(cairo);
}

bool worth_a_mark(const Origin& origin) {
  constexpr double least_probability = 0.05;
  return origin.claimed || origin.probability >= least_probability;
}

std::string probability_text(double probability) {
  if (probability > 0.995) return "> 0.99";
  if (probability < 0.005) return "< 0.01";
  return fixed_text(probability, 2);
}

}  // namespace wavefount
