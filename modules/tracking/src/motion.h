#pragma once

#include <vector>

#include "detections.h"
#include "flow.h"

namespace wavefount::tracking {

/// How far a nucleus strays from its predicted place, and how its looks change, with time.
struct Motion {
  double place_variance_um2 = 0;   ///< of one displacement at once, an axis
  double spread_um2_per_min = 0;   ///< what each minute adds
  double log_brightness_sd = 0.1;  ///< a typical step
  double log_area_sd = 0.1;        ///< a typical step

  double variance(double minutes) const {
    return place_variance_um2 + spread_um2_per_min * minutes;
  }
};

/// −log density of a displacement under a two-dimensional Student distribution: nuclei jostle and
/// outlines jump now and then, so tails are heavier than a Gaussian's.
double displacement_cost(double distance_um, double variance_um2);

/// log(to / from) of two brightnesses or areas, with what is not positive taken for very small.
double log_ratio(double to, double from);

/// A first set of safe links: detections of successive steps that are each other's nearest. Steps
/// at which the whole view shifts are found on the way.
struct FirstLook {
  std::vector<Link> links;
  std::vector<Point> common;  ///< by step, shift of the whole view
  int unreported_jumps = 0;
};
FirstLook first_look(const FilmDetections& film);

/// Scale of motion from the first look's links, robustly.
Motion estimate_motion(const FilmDetections& film, const std::vector<Link>& links,
                       const Flow& flow);

}  // namespace wavefount::tracking
