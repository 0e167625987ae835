#pragma once

#include <string>
#include <vector>

#include "wavefount/pictures/canvas.h"

namespace wavefount {

struct Range {
  double low = 0, high = 1;
  double span() const { return high - low; }
};

struct Box {
  double x = 0, y = 0, width = 0, height = 0;
};

/// Round values (1, 2 or 5 times a power of ten apart) inside a range, about `wanted` of them.
std::vector<double> round_ticks(Range range, int wanted);
/// Largest of 1, 2, 5 times a power of ten that is not above the value; for scale bars.
double round_below(double value);

/// With a fixed number of decimals, as in a table; "unknown" for a value that is not finite.
std::string fixed_text(double value, int decimals);

/// A field in which data are drawn: left to right along x; y goes down where `downwards`.
class Plot {
 public:
  Plot(Canvas& canvas, Box box, Range x, Range y, bool downwards);

  const Box& box() const { return box_; }
  double x_at(double value) const;
  double y_at(double value) const;
  Point at(double x, double y) const { return {x_at(x), y_at(y)}; }

  /// Draws only inside the field until `release`.
  void clip();
  void release();
  /// Frame and round ticks with numbers below; `label` with the unit, none where empty.
  void axis_below(const std::string& label, bool numbers = true);
  void axis_left(const std::string& label, int wanted_ticks = 6);

 private:
  Canvas& canvas_;
  Box box_;
  Range x_, y_;
  bool downwards_;
};

/// A bar of a colour map with round ticks, to the right of a plot.
void colour_bar(Canvas& canvas, Box box, const ColourMap& map, Range values,
                const std::string& label);
/// A bar of a round length in a corner; `left_bottom` is its left end.
void scale_bar(Canvas& canvas, Point left_bottom, double pixels_per_um, double longest_px,
               const Colour& colour);
/// Title at the top left and, in grey, what the picture shows.
void title(Canvas& canvas, const std::string& acquisition, const std::string& what);

/// Sizes of letters, in pixels.
constexpr double title_size = 26;
constexpr double label_size = 19;
constexpr double tick_size = 17;
constexpr double small_size = 14;

}  // namespace wavefount
