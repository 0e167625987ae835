#include <gtest/gtest.h>

#include <cmath>

#include "wavefount/core/tube.h"

namespace wavefount {
namespace {

/// A tube of 1000 × 100 µm from (0, 0), turned by an angle around the origin.
Tube straight_tube(double angle) {
  const auto turned = [&](double x, double y) {
    return Point{x * std::cos(angle) - y * std::sin(angle),
                 x * std::sin(angle) + y * std::cos(angle)};
  };
  Tube tube;
  tube.outline_um = {turned(0, -50), turned(1000, -50), turned(1000, 50), turned(0, 50)};
  tube.axis_um = {turned(0, 0), turned(1000, 0)};
  tube.length_um = 1000;
  tube.width_um = 100;
  return tube;
}

TEST(Tube, PlacesAlongAndAcross) {
  const auto place = straight_tube(0).place({300, 20});
  EXPECT_DOUBLE_EQ(place.along_um, 300);
  EXPECT_DOUBLE_EQ(place.across_um, 20);
  EXPECT_DOUBLE_EQ(place.end_distance_um, 300);
  EXPECT_DOUBLE_EQ(place.wall_distance_um, 30);
  EXPECT_TRUE(std::isinf(place.open_distance_um));
}

TEST(Tube, AcrossOfAnUprightTubeGrowsToTheRight) {
  const auto tube = straight_tube(M_PI / 2);
  const auto place = tube.place({20, 300});
  EXPECT_NEAR(place.along_um, 300, 1e-9);
  EXPECT_NEAR(place.across_um, 20, 1e-9);
}

TEST(Tube, OpenEndsAndWallsDoNotCount) {
  auto tube = straight_tube(0);
  tube.left_end = Boundary::open;
  tube.upper_wall = Boundary::open;
  const auto place = tube.place({300, -20});
  EXPECT_DOUBLE_EQ(place.end_distance_um, 700);
  EXPECT_DOUBLE_EQ(place.open_distance_um, 300);
  EXPECT_DOUBLE_EQ(place.wall_distance_um, 70);
}

TEST(Tube, HolesAreOutside) {
  auto tube = straight_tube(0);
  tube.holes_um = {{{400, -10}, {420, -10}, {420, 10}, {400, 10}}};
  EXPECT_TRUE(tube.contains({300, 0}));
  EXPECT_FALSE(tube.contains({410, 0}));
  EXPECT_FALSE(tube.contains({300, 60}));
  EXPECT_DOUBLE_EQ(tube.edge_distance_um({390, 0}), 10);
  EXPECT_DOUBLE_EQ(tube.edge_distance_um({410, 0}), -10);
  EXPECT_DOUBLE_EQ(tube.area_um2(), 1e5 - 400);
}

TEST(Tube, FollowsABentAxis) {
  Tube tube;
  tube.axis_um = {{0, 0}, {100, 0}, {100, 100}};
  tube.length_um = 200;
  tube.width_um = 20;
  const auto place = tube.place({105, 50});
  EXPECT_DOUBLE_EQ(place.along_um, 150);
  EXPECT_DOUBLE_EQ(std::abs(place.across_um), 5);
  EXPECT_DOUBLE_EQ(tube.place({-10, 0}).along_um, -10) << "the axis goes on beyond its ends";
}

}  // namespace
}  // namespace wavefount
