#pragma once

#include <vector>

#include "wavefount/core/nucleus.h"
#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"

namespace wavefount {

/// Area of each place's Voronoi cell inside the tube's outline and outside its bubbles, µm². The
/// outline is clipped by the bisectors towards the Delaunay neighbours (Sutherland & Hodgman 1974;
/// the area stays right for outlines that are not convex). Zero without an outline.
std::vector<double> voronoi_areas_um2(const std::vector<Point>& places_um, const Tube& tube);

/// Territory and nearest distance of every nucleus among those present at the same time: medians
/// over moments spread over the film. `moments_min`: when to look.
Territories measure_territories(const Nuclei& nuclei, const Tube& tube,
                                const std::vector<double>& moments_min);

/// Where a nucleus was at a time: its point nearest in time; empty before its first or after its
/// last point.
std::optional<Point> place_at(const Nucleus& nucleus, double time_min);

}  // namespace wavefount
