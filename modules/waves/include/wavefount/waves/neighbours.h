#pragma once

#include <vector>

#include "wavefount/core/tube.h"

namespace wavefount {

/// A pair of places by position, a < b.
struct Link {
  int a = 0, b = 0;
  double length_um = 0;
  bool bridge =
      false;  ///< over a gap too long for neighbours; keeps parts together, proves nothing
};

/// Which places are neighbours inside the tube.
struct NeighbourGraph {
  std::vector<Link> links;                   ///< sorted by (a, b)
  std::vector<std::vector<int>> neighbours;  ///< by place, rising, bridges included
};

struct NeighbourRules {
  /// Links longer than this many spacings are cut: what happens in between is not seen.
  double longest_spacings = 2.5;
  /// Parts that a long link would join stay one group, by a bridge, up to this many spacings.
  double longest_bridge_spacings = 6;
};

/// Links of the Delaunay triangulation (Boost.Polygon's Voronoi diagram on a grid of ±2^30);
/// collinear places give a chain, equal places are linked with one another.
std::vector<Link> delaunay_links(const std::vector<Point>& places_um);

/// Median distance to the nearest other place; 0 for fewer than two places.
double median_spacing_um(const std::vector<Point>& places_um);

/// Delaunay links less those that (1) leave the tube or cross a bubble, (2) have a third place
/// almost in between (seen from it the two ends are more than 120° apart), (3) are too long; plus
/// the shortest bridges that keep parts together where (3) alone cut them.
NeighbourGraph neighbour_graph(const std::vector<Point>& places_um, const Tube& tube,
                               double spacing_um, const NeighbourRules& rules = {});

/// Number of the part that each place belongs to, from 0 in order of the first place.
std::vector<int> connected_parts(std::size_t places, const std::vector<Link>& links);

}  // namespace wavefount
