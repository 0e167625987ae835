#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "wavefount/core/random.h"
#include "wavefount/core/tube.h"
#include "wavefount/tube/find_tubes.h"

namespace wavefount::tube {
namespace {

/// An ellipse of 300 × 120 pixels, blurred edge, noise.
ImagePointer embryo(double angle) {
  auto image = make_image(400, 240);
  RandomStream random(4);
  for (int y = 0; y < 240; ++y) {
    for (int x = 0; x < 400; ++x) {
      const double u = (x - 200) * std::cos(angle) + (y - 120) * std::sin(angle);
      const double v = -(x - 200) * std::sin(angle) + (y - 120) * std::cos(angle);
      const double radius = std::hypot(u / 150, v / 60);
      const double slope = std::hypot(u / (150.0 * 150), v / (60.0 * 60)) / std::max(radius, 0.1);
      const double depth = (1 - radius) / std::max(slope, 1e-3);
      const double light = 100 + 150 * 0.5 * std::erfc(-depth / 2) + 4 * random.normal();
      image->GetBufferPointer()[y * 400 + x] = static_cast<float>(light);
    }
  }
  return image;
}

TEST(Embryo, OneClosedCurve) {
  for (const double angle : {0.0, 0.3}) {
    FilmDescription film;
    film.width = 400;
    film.height = 240;
    film.pixel_um = 1;
    film.frames = 1;
    Prescan prescan;
    prescan.low = prescan.median = embryo(angle);
    Messages messages;
    const auto tubes = find_tubes(film, prescan, {}, messages);
    ASSERT_EQ(tubes.tubes.size(), 1U);
    const auto& tube = tubes.tubes[0];
    EXPECT_TRUE(tube.measured);
    EXPECT_TRUE(tube.wide);
    EXPECT_NEAR(tube.width_um, 120, 2.4);
    EXPECT_NEAR(tube.length_um, 300, 4);
    const double area = std::numbers::pi * 150 * 60;
    EXPECT_NEAR(tube.area_um2(), area, 0.02 * area);
  }
}

}  // namespace
}  // namespace wavefount::tube
