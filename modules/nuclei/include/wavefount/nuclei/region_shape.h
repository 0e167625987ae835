#pragma once

#include <opencv2/core/mat.hpp>
#include <vector>

#include "wavefount/core/observations.h"
#include "wavefount/nuclei/region_growing.h"

namespace wavefount::nuclei {

/// The shape of one region of a label window, in pixels of the window.
struct RegionShape {
  int pixels = 0;
  double x = 0, y = 0;     ///< centroid
  double area = 0;         ///< subpixel: an edge pixel counts by how far the contour covers it
  double slenderness = 1;  ///< ratio of the axes of the ellipse with the same second moments
  double slope = 0;        ///< mean fall of brightness across the contour, counts a pixel
  bool split = false;      ///< touches another region
  std::vector<Run> runs;   ///< of the window, not of the frame
};

/// Shape of the pixels that carry `label`, all of which lie in `box`. `image`: what the region was
/// grown on; `half`: the level of its contour.
RegionShape shape_of(const cv::Mat1i& labels, int label, const cv::Rect& box,
                     const cv::Mat1f& image, double half);

/// Fall of brightness a pixel between a quarter of `radius` inside of a region's outline and as far
/// outside of it, other regions left out: too coarse for a sharp edge, but for a wide soft one free
/// of the noise that a slope between neighbouring pixels has.
double wide_slope(const cv::Mat1i& labels, int label, const cv::Rect& box, const cv::Mat1f& image,
                  double radius);

/// Share of the convex hull that the runs fill, 1 when they have no dent.
double solidity(const std::vector<Run>& runs);

/// Joins regions that are one nucleus: bright all the way across their common border and without a
/// neck, or a small patch mostly surrounded by another. `seeds` gives the levels; a joined pair
/// takes the lower index, a patch its host's.
void join_regions(cv::Mat1i& labels, const cv::Mat1f& image, const std::vector<Seed>& seeds,
                  double largest_radius);

}  // namespace wavefount::nuclei
