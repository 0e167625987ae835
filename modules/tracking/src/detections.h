#pragma once

#include <cmath>
#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/tube.h"

namespace wavefount::tracking {

/// One usable sighting, in µm, drift removed.
struct Detection {
  int step = 0;      ///< index into FilmDetections::frames
  int sighting = 0;  ///< index into FrameObservation::sightings
  Point place_um;
  double radius_um = 0;
  double area_um2 = 0;
  double brightness = 0;
  double integrated = 0;
  double sigma = 0;
};

/// All detections of a film. A *step* counts usable frames only: what lies between two steps is
/// bridged by time, not by the number of frames.
struct FilmDetections {
  std::vector<int> frames;       ///< by step: position in Observations::frames
  std::vector<double> time_min;  ///< by step
  std::vector<int> first;        ///< by step, and one more: where its detections start in `all`
  std::vector<Detection> all;    ///< by step
  std::vector<bool> jump;        ///< by step: the stage is reported to have jumped since the last
  double pixel_um = 1;
  double interval_min = 1;  ///< median between steps; 1 with fewer than two steps
  double spacing_um = 1;    ///< typical distance between nearest nuclei
  double radius_um = 1;     ///< median
  double area_um2 = 1;      ///< of the tube, or of the field that the detections cover

  int steps() const { return static_cast<int>(frames.size()); }
  double time_of(int detection) const { return time_min[all[detection].step]; }
  double duration_min() const { return steps() < 2 ? 0 : time_min.back() - time_min.front(); }
};

FilmDetections gather_detections(const FilmDescription& film, const Observations& observations,
                                 const Tube& tube, const Drift& drift);

/// Drift of one frame, full-size pixels; zero where it is not known.
Point drift_px(const Drift& drift, int frame);

inline double distance(Point a, Point b) {
  const double dx = a.x - b.x;
  const double dy = a.y - b.y;
  return std::sqrt(dx * dx + dy * dy);
}
inline Point operator+(Point a, Point b) {
  return {a.x + b.x, a.y + b.y};
}
inline Point operator-(Point a, Point b) {
  return {a.x - b.x, a.y - b.y};
}
inline Point operator*(double s, Point a) {
  return {s * a.x, s * a.y};
}

}  // namespace wavefount::tracking
