#include "wavefount/pictures/colour.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

namespace wavefount {
namespace {

double linear(double value) {
  return value <= 0.04045 ? value / 12.92 : std::pow((value + 0.055) / 1.055, 2.4);
}

/// OKLab of a colour on the screen: the published inverse of what `srgb_of` does.
Lab lab_back(const Colour& colour) {
  const double red = linear(colour.red);
  const double green = linear(colour.green);
  const double blue = linear(colour.blue);
  const double l = std::cbrt(0.4122214708 * red + 0.5363325363 * green + 0.0514459929 * blue);
  const double m = std::cbrt(0.2119034982 * red + 0.6806995451 * green + 0.1073969566 * blue);
  const double s = std::cbrt(0.0883024619 * red + 0.2817188376 * green + 0.6299787005 * blue);
  return {0.2104542553 * l + 0.7936177850 * m - 0.0040720468 * s,
          1.9779984951 * l - 2.4285922050 * m + 0.4505937099 * s,
          0.0259040371 * l + 0.7827717662 * m - 0.8086757660 * s};
}

/// Relative luminance, as greyscale print shows it.
double luminance(const Colour& colour) {
  return 0.2126 * linear(colour.red) + 0.7152 * linear(colour.green) + 0.0722 * linear(colour.blue);
}

class Maps : public testing::TestWithParam<const ColourMap*> {};

TEST_P(Maps, GrowLighterInEqualSteps) {
  const auto& map = *GetParam();
  constexpr int steps = 32;
  double shortest = 1e9, longest = 0;
  for (int i = 1; i <= steps; ++i) {
    const auto before = lab_back(map((i - 1.0) / steps));
    const auto after = lab_back(map(double(i) / steps));
    EXPECT_GT(luminance(map(double(i) / steps)), luminance(map((i - 1.0) / steps)));
    const double step =
        std::hypot(after.lightness - before.lightness, after.a - before.a, after.b - before.b);
    shortest = std::min(shortest, step);
    longest = std::max(longest, step);
  }
  EXPECT_LT(longest / shortest, 1.25);
}

TEST_P(Maps, TakeTheNearestEndOutside) {
  const auto& map = *GetParam();
  EXPECT_EQ(map.pixel(-3), map.pixel(0));
  EXPECT_EQ(map.pixel(7), map.pixel(1));
}

INSTANTIATE_TEST_SUITE_P(Colour, Maps, testing::Values(&light_map(), &time_map()));

TEST(Colour, AgreesWithThePublishedConversion) {
  const auto red = lab_back({1, 0, 0});
  EXPECT_NEAR(red.lightness, 0.628, 1e-3);
  const auto back = srgb_of(red);
  EXPECT_NEAR(back.red, 1, 1e-3);
  EXPECT_NEAR(back.green, 0, 1e-2);
}

}  // namespace
}  // namespace wavefount
