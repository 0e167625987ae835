#include <gtest/gtest.h>

#include <cmath>
#include <numeric>

#include "scenes.h"
#include "wavefount/waves/neighbours.h"
#include "wavefount/waves/territories.h"

namespace wavefount::testing {
namespace {

std::vector<Point> chain(int count, double step) {
  std::vector<Point> places;
  for (int i = 0; i < count; ++i) places.push_back({50 + step * i, 50.0 + (i % 2 == 0 ? 5 : -5)});
  return places;
}

bool linked(const NeighbourGraph& graph, int a, int b) {
  const auto& list = graph.neighbours[a];
  return std::find(list.begin(), list.end(), b) != list.end();
}

TEST(Neighbours, AZigzagInAThinTubeIsAChain) {
  const auto graph = neighbour_graph(chain(8, 150), straight_tube(1200, 100), 150);
  ASSERT_EQ(graph.links.size(), 7U);
  for (int i = 0; i < 7; ++i) EXPECT_TRUE(linked(graph, i, i + 1));
}

TEST(Neighbours, CollinearAndEqualPlacesAreLinked) {
  const std::vector<Point> places{{0, 0}, {100, 0}, {100, 0}, {200, 0}};
  const auto part = connected_parts(places.size(), delaunay_links(places));
  for (const int one : part) EXPECT_EQ(one, 0);
  EXPECT_TRUE(delaunay_links({{5, 5}}).empty());
  EXPECT_TRUE(delaunay_links({}).empty());
}

TEST(Neighbours, ALongGapIsABridgeAndATooLongOneNone) {
  auto places = chain(4, 150);
  for (auto place : chain(4, 150)) places.push_back({place.x + 1050, place.y});
  const auto bridged = neighbour_graph(places, straight_tube(2000, 100), 150);
  EXPECT_EQ(std::count_if(bridged.links.begin(), bridged.links.end(),
                          [](const Link& link) { return link.bridge; }),
            1);
  const auto cut = neighbour_graph(places, straight_tube(2000, 100), 150, {2.5, 3});
  EXPECT_EQ(cut.links.size(), 6U);
}

TEST(Neighbours, NobodyIsANeighbourAcrossABubble) {
  auto tube = straight_tube(1200, 100);
  tube.holes_um.push_back({{260, 0}, {340, 0}, {340, 100}, {260, 100}});
  const auto graph = neighbour_graph({{80, 50}, {230, 50}, {380, 50}, {530, 50}}, tube, 150);
  EXPECT_TRUE(linked(graph, 0, 1));
  EXPECT_FALSE(linked(graph, 1, 2));
  EXPECT_TRUE(linked(graph, 2, 3));
}

TEST(Territories, FillTheTubeLessItsBubbles) {
  const auto scene = make_scene({.width_um = 560, .seed = 3});
  auto tube = scene.tube;
  tube.holes_um.push_back({{300, 200}, {420, 200}, {420, 330}, {300, 330}});
  std::vector<Point> places;
  for (const auto& nucleus : scene.nuclei.nuclei)
    places.push_back({nucleus.points[0].x_um, nucleus.points[0].y_um});
  const auto areas = voronoi_areas_um2(places, tube);
  EXPECT_NEAR(std::accumulate(areas.begin(), areas.end(), 0.0), tube.area_um2(), 1);
}

TEST(Territories, AreEmptyWhereNothingIsDefined) {
  Nuclei nuclei;
  nuclei.nuclei.resize(1);
  const auto territories = measure_territories(nuclei, {}, {0.0});
  ASSERT_EQ(territories.territory_um2.size(), 1U);
  EXPECT_FALSE(territories.territory_um2[0]);
  EXPECT_FALSE(territories.nearest_um[0]);
}

}  // namespace
}  // namespace wavefount::testing
