#include "wavefount/waves/neighbours.h"

#include <algorithm>
#include <boost/polygon/voronoi.hpp>
#include <cmath>
#include <cstdint>
#include <limits>
#include <map>
#include <numeric>
#include <set>
#include <utility>

#include "wavefount/core/robust.h"

namespace wavefount {
namespace {

using GridPoint = boost::polygon::point_data<std::int32_t>;
using Pair = std::pair<int, int>;

double distance(Point a, Point b) {
  return std::hypot(a.x - b.x, a.y - b.y);
}

/// Places on the whole-number grid that the Voronoi builder takes: it would cut off fractions.
std::vector<GridPoint> on_grid(const std::vector<Point>& places) {
  constexpr double half_range = 0x1p30;
  double low_x = places[0].x, high_x = low_x, low_y = places[0].y, high_y = low_y;
  for (const auto& place : places) {
    low_x = std::min(low_x, place.x);
    high_x = std::max(high_x, place.x);
    low_y = std::min(low_y, place.y);
    high_y = std::max(high_y, place.y);
  }
  const double extent = std::max({high_x - low_x, high_y - low_y, 1e-9});
  const double scale = half_range / extent;
  std::vector<GridPoint> grid;
  grid.reserve(places.size());
  for (const auto& place : places)
    grid.emplace_back(
        static_cast<std::int32_t>(std::lround((place.x - (low_x + high_x) / 2) * scale)),
        static_cast<std::int32_t>(std::lround((place.y - (low_y + high_y) / 2) * scale)));
  return grid;
}

std::set<Pair> voronoi_pairs(const std::vector<GridPoint>& sites, const std::vector<int>& owner) {
  boost::polygon::voronoi_diagram<double> diagram;
  boost::polygon::construct_voronoi(sites.begin(), sites.end(), &diagram);
  std::set<Pair> pairs;
  for (const auto& edge : diagram.edges()) {
    const int a = owner[edge.cell()->source_index()];
    const int b = owner[edge.twin()->cell()->source_index()];
    if (a < b) pairs.emplace(a, b);
  }
  return pairs;
}

bool leaves_tube(Point a, Point b, const Tube& tube) {
  if (tube.outline_um.size() < 3) return false;
  constexpr int steps = 16;
  // Nuclei at a wall may have their centre a little outside the measured outline; only a chord
  // whose inner part lies outside runs from one stretch of a bent tube into another.
  for (int i = 1; i < steps; ++i) {
    const double share = static_cast<double>(i) / steps;
    const Point between{a.x + share * (b.x - a.x), a.y + share * (b.y - a.y)};
    if (tube.contains(between)) continue;
    if (tube.edge_distance_um(between) < -0.05 * tube.width_um) return true;
    for (const auto& hole : tube.holes_um)
      if (inside(hole, between)) return true;
  }
  return false;
}

/// True when some common neighbour sees the two ends more than 120° apart.
bool has_one_between(const Link& link, const std::vector<Point>& places,
                     const std::vector<std::vector<int>>& around) {
  const double square = link.length_um * link.length_um;
  for (const int c : around[link.a]) {
    if (c == link.b) continue;
    const double to_a = distance(places[c], places[link.a]);
    const double to_b = distance(places[c], places[link.b]);
    if (to_a > 0 && to_b > 0 && to_a * to_a + to_b * to_b + to_a * to_b < square) return true;
  }
  return false;
}

std::vector<std::vector<int>> lists_of(std::size_t places, const std::vector<Link>& links) {
  std::vector<std::vector<int>> lists(places);
  for (const auto& link : links) {
    lists[link.a].push_back(link.b);
    lists[link.b].push_back(link.a);
  }
  for (auto& list : lists) std::sort(list.begin(), list.end());
  return lists;
}

int root_of(std::vector<int>& parent, int place) {
  while (parent[place] != place) place = parent[place] = parent[parent[place]];
  return place;
}

void add_bridges(std::vector<Link>& kept, std::vector<Link> too_long, std::size_t places,
                 double longest) {
  std::vector<int> parent(places);
  std::iota(parent.begin(), parent.end(), 0);
  for (const auto& link : kept) parent[root_of(parent, link.a)] = root_of(parent, link.b);
  std::stable_sort(too_long.begin(), too_long.end(), [](const Link& left, const Link& right) {
    return left.length_um < right.length_um;
  });
  for (auto& link : too_long) {
    const int a = root_of(parent, link.a);
    const int b = root_of(parent, link.b);
    if (a == b || link.length_um > longest) continue;
    parent[a] = b;
    link.bridge = true;
    kept.push_back(link);
  }
}

}  // namespace

std::vector<Link> delaunay_links(const std::vector<Point>& places_um) {
  std::vector<Link> links;
  if (places_um.size() < 2) return links;
  const auto grid = on_grid(places_um);
  std::map<Pair, int> first_at;
  std::vector<GridPoint> sites;
  std::vector<int> owner;
  std::set<Pair> pairs;
  for (int i = 0; i < static_cast<int>(grid.size()); ++i) {
    const auto [at, fresh] = first_at.emplace(Pair(grid[i].x(), grid[i].y()), i);
    if (fresh) {
      sites.push_back(grid[i]);
      owner.push_back(i);
    } else {
      pairs.emplace(at->second, i);
    }
  }
  if (sites.size() > 1) pairs.merge(voronoi_pairs(sites, owner));
  for (const auto& [a, b] : pairs)
    links.push_back({a, b, distance(places_um[a], places_um[b]), false});
  return links;
}

double median_spacing_um(const std::vector<Point>& places_um) {
  std::vector<double> nearest(places_um.size(), std::numeric_limits<double>::infinity());
  for (const auto& link : delaunay_links(places_um)) {
    nearest[link.a] = std::min(nearest[link.a], link.length_um);
    nearest[link.b] = std::min(nearest[link.b], link.length_um);
  }
  return places_um.size() < 2 ? 0 : median(std::move(nearest));
}

NeighbourGraph neighbour_graph(const std::vector<Point>& places_um, const Tube& tube,
                               double spacing_um, const NeighbourRules& rules) {
  const auto all = delaunay_links(places_um);
  const auto around = lists_of(places_um.size(), all);
  NeighbourGraph graph;
  std::vector<Link> too_long;
  for (const auto& link : all) {
    if (has_one_between(link, places_um, around)) continue;
    if (leaves_tube(places_um[link.a], places_um[link.b], tube)) continue;
    const bool near = link.length_um <= rules.longest_spacings * spacing_um;
    (near ? graph.links : too_long).push_back(link);
  }
  add_bridges(graph.links, std::move(too_long), places_um.size(),
              rules.longest_bridge_spacings * spacing_um);
  std::sort(graph.links.begin(), graph.links.end(), [](const Link& left, const Link& right) {
    return Pair(left.a, left.b) < Pair(right.a, right.b);
  });
  graph.neighbours = lists_of(places_um.size(), graph.links);
  return graph;
}

std::vector<int> connected_parts(std::size_t places, const std::vector<Link>& links) {
  std::vector<int> parent(places);
  std::iota(parent.begin(), parent.end(), 0);
  for (const auto& link : links) parent[root_of(parent, link.a)] = root_of(parent, link.b);
  std::vector<int> part(places, -1);
  std::map<int, int> number;
  for (int i = 0; i < static_cast<int>(places); ++i)
    part[i] = number.emplace(root_of(parent, i), static_cast<int>(number.size())).first->second;
  return part;
}

}  // namespace wavefount
