#include "wavefount/pictures/plot.h"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>

#include "wavefount/core/text.h"

namespace wavefount {
namespace {

constexpr double tick_length = 6;

/// Numbers of ticks are exact multiples of a round step: three decimals beyond it are enough.
std::string tick_text(double value, double step) {
  const double rounded = std::round(value / step) * step;
  return rounded_text(std::abs(rounded) < step / 1000 ? 0 : rounded, 6);
}

double step_of(const std::vector<double>& ticks) {
  return ticks.size() > 1 ? ticks[1] - ticks[0] : 1;
}

}  // namespace

std::string fixed_text(double value, int decimals) {
  if (!std::isfinite(value)) return "unknown";
  std::array<char, 400> text{};  // the largest double has 309 digits
  const auto end = std::to_chars(text.data(), text.data() + text.size(), value,
                                 std::chars_format::fixed, decimals)
                       .ptr;
  return {text.data(), end};
}

double round_below(double value) {
  if (!(value > 0) || !std::isfinite(value)) return 1;
  const double power = std::pow(10, std::floor(std::log10(value)));
  for (const double factor : {5.0, 2.0})
    if (factor * power <= value) return factor * power;
  return power;
}

std::vector<double> round_ticks(Range range, int wanted) {
  if (!(range.span() > 0) || !std::isfinite(range.span())) return {range.low};
  const double rough = range.span() / std::max(wanted, 1);
  double step = round_below(rough);
  if (range.span() / step > 1.6 * wanted) step = round_below(2.5 * step);
  std::vector<double> ticks;
  const double slack = 1e-9 * range.span();
  for (double i = std::ceil((range.low - slack) / step); i * step <= range.high + slack; ++i)
    ticks.push_back(i * step);
  return ticks;
}

Plot::Plot(Canvas& canvas, Box box, Range x, Range y, bool downwards)
    : canvas_(canvas), box_(box), x_(x), y_(y), downwards_(downwards) {
  if (!(x_.span() > 0)) x_.high = x_.low + 1;
  if (!(y_.span() > 0)) y_.high = y_.low + 1;
}

double Plot::x_at(double value) const {
  return box_.x + box_.width * (value - x_.low) / x_.span();
}

double Plot::y_at(double value) const {
  const double share = (value - y_.low) / y_.span();
  return box_.y + box_.height * (downwards_ ? share : 1 - share);
}

void Plot::clip() {
  cairo_save(canvas_.cairo());
  cairo_rectangle(canvas_.cairo(), box_.x, box_.y, box_.width, box_.height);
  cairo_clip(canvas_.cairo());
}

void Plot::release() {
  cairo_restore(canvas_.cairo());
}

void Plot::axis_below(const std::string& label, bool numbers) {
  const double bottom = box_.y + box_.height;
  canvas_.set(palette::ink);
  canvas_.line({box_.x, bottom}, {box_.x + box_.width, bottom}, 1.5);
  const auto ticks = round_ticks(x_, static_cast<int>(box_.width / 110));
  for (const double tick : ticks) {
    const double x = x_at(tick);
    canvas_.line({x, bottom}, {x, bottom + tick_length}, 1.5);
    if (numbers)
      canvas_.text({x, bottom + tick_length + tick_size}, tick_text(tick, step_of(ticks)),
                   tick_size, Anchor::middle);
  }
  if (!label.empty())
    canvas_.text({box_.x + box_.width / 2, bottom + tick_length + tick_size + label_size + 9},
                 label, label_size, Anchor::middle);
}

void Plot::axis_left(const std::string& label, int wanted_ticks) {
  canvas_.set(palette::ink);
  canvas_.line({box_.x, box_.y}, {box_.x, box_.y + box_.height}, 1.5);
  const auto ticks = round_ticks(y_, wanted_ticks);
  double widest = 0;
  for (const double tick : ticks) {
    const double y = y_at(tick);
    const auto text = tick_text(tick, step_of(ticks));
    canvas_.line({box_.x - tick_length, y}, {box_.x, y}, 1.5);
    canvas_.text({box_.x - tick_length - 4, y + tick_size * 0.36}, text, tick_size, Anchor::end);
    widest = std::max(widest, canvas_.text_width(text, tick_size));
  }
  if (!label.empty())
    canvas_.text_upwards({box_.x - tick_length - widest - 14, box_.y + box_.height / 2}, label,
                         label_size);
}

void colour_bar(Canvas& canvas, Box box, const ColourMap& map, Range values,
                const std::string& label) {
  const int rows = std::max(1, static_cast<int>(box.height));
  for (int row = 0; row < rows; ++row) {
    canvas.set(map((row + 0.5) / rows));
    cairo_rectangle(canvas.cairo(), box.x, box.y + box.height * row / rows, box.width,
                    box.height / rows + 1);
    cairo_fill(canvas.cairo());
  }
  canvas.set(palette::ink);
  const auto ticks = round_ticks(values, std::max(2, static_cast<int>(box.height / 60)));
  for (const double tick : ticks) {
    if (!(values.span() > 0)) break;
    const double y = box.y + box.height * (tick - values.low) / values.span();
    canvas.line({box.x + box.width, y}, {box.x + box.width + tick_length, y}, 1.5);
    canvas.text({box.x + box.width + tick_length + 4, y + tick_size * 0.36},
                tick_text(tick, step_of(ticks)), tick_size);
  }
  canvas.text_upwards({box.x - 10, box.y + box.height / 2}, label, small_size + 1);
}

void scale_bar(Canvas& canvas, Point left_bottom, double pixels_per_um, double longest_px,
               const Colour& colour) {
  const double length_um = round_below(longest_px / pixels_per_um);
  const double length_px = length_um * pixels_per_um;
  canvas.set(colour);
  canvas.line(left_bottom, {left_bottom.x + length_px, left_bottom.y}, 5);
  const bool millimetres = length_um >= 1000;
  canvas.text(
      {left_bottom.x + length_px / 2, left_bottom.y - 9},
      rounded_text(millimetres ? length_um / 1000 : length_um) + (millimetres ? " mm" : " µm"),
      tick_size, Anchor::middle);
}

void title(Canvas& canvas, const std::string& acquisition, const std::string& what) {
  constexpr double left = 30;
  constexpr double base = 42;
  const double room = canvas.width() - 2 * left;
  canvas.set(palette::grey);
  canvas.text({canvas.width() - left, base}, what, label_size, Anchor::end);
  const double name_room = room - canvas.text_width(what, label_size) - 30;
  canvas.set(palette::ink);
  canvas.text({left, base}, canvas.fitted(acquisition, title_size, name_room, true), title_size,
              Anchor::start, true);
}

}  // namespace wavefount
