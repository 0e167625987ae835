#pragma once

#include <vector>

#include "detections.h"

namespace wavefount::tracking {

/// A detection and the same nucleus' next one.
struct Link {
  int from = 0;
  int to = 0;
};

/// What all nuclei around a place do together: slow flow and residual drift as a velocity field
/// that varies slowly in space and time, and shifts of the whole view at single steps.
class Flow {
 public:
  Flow() = default;
  /// `common`: by step, shift of the whole view since the step before, µm.
  Flow(const FilmDetections& film, const std::vector<Link>& links, std::vector<Point> common);

  /// Expected displacement of what is at `place` in step `from`, until step `to` >= from.
  Point shift(Point place, int from, int to) const;
  const std::vector<Point>& common() const { return common_; }

 private:
  struct Sums {
    Point displacement;
    double time_min = 0;
  };

  int bin_of(double time_min) const;
  int cell_of(Point place) const;
  std::vector<Sums> collect(const FilmDetections& film, const std::vector<Link>& links) const;
  static void spread(std::vector<Sums>& sums, int stride, int count, double sd);

  std::vector<Point> common_;
  std::vector<Point> common_until_;  ///< running sum of common_
  std::vector<double> time_min_;     ///< by step
  double start_min_ = 0, bin_min_ = 1;
  double left_um_ = 0, top_um_ = 0, cell_um_ = 1;
  int bins_ = 0, across_ = 0, down_ = 0;
  std::vector<Point> velocity_;  ///< µm/min by bin, then cell
};

}  // namespace wavefount::tracking
