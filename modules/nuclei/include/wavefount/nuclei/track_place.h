#pragma once

#include <vector>

#include "wavefount/core/nucleus.h"

namespace wavefount::nuclei {

/// Where a nucleus is in any frame, in µm, from the points of its trace: where it was found, and
/// where linking says it was in between.
class TrackPlace {
 public:
  TrackPlace() = default;
  explicit TrackPlace(const Nucleus& nucleus);

  bool known() const { return !frames_.empty(); }
  int first_frame() const { return frames_.front(); }
  int last_frame() const { return frames_.back(); }
  double first_min() const { return times_.front(); }
  double last_min() const { return times_.back(); }
  /// Interpolated in time between points; before the first and after the last the median of the
  /// nearest three.
  Point at(double time_min) const;
  /// Upper quartile of the outlines' radii: the mature nucleus, µm.
  double aperture_radius_um() const { return aperture_radius_um_; }

 private:
  std::vector<int> frames_;
  std::vector<double> times_;
  std::vector<Point> places_;
  Point first_, last_;
  double aperture_radius_um_ = 0;
};

}  // namespace wavefount::nuclei
