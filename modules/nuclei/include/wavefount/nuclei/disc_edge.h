#pragma once

namespace wavefount::nuclei {

/// The edge of a uniform disc of radius 1 and height 1 seen through a Gaussian blur, and what its
/// half-maximum outline makes of it. Lengths are in units of the disc's radius.
struct DiscEdge {
  double blur = 0;         ///< standard deviation of the blur
  double half_radius = 1;  ///< where the profile crosses half of `inner`
  double inner = 1;        ///< profile at 0.35 half_radius: the median over the inner half
  double mean_inside = 1;  ///< mean of the profile inside half_radius
  double edge = 0;         ///< blur as the slope at half_radius tells, over half_radius
};

/// The disc of the given blur; beyond the table it is held at its end (0.6).
DiscEdge disc_edge(double blur);
/// The disc whose outline looks like `edge` (inner / (√(2π) · slope · half radius)): how sharp an
/// edge is, measured on the outline alone, tells how blurred the disc is. Values beyond the table
/// are held at its ends.
DiscEdge disc_with_edge(double edge);

}  // namespace wavefount::nuclei
