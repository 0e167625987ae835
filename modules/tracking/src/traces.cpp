#include "traces.h"

#include <algorithm>
#include <cmath>

#include "wavefount/core/robust.h"

namespace wavefount::tracking {
namespace {

/// Steps on either side whose sharpness a step is held against.
constexpr int focus_window = 7;
/// Below this share of theirs it is out of focus.
constexpr double focus_share = 0.6;

double median_sharpness(const FilmDetections& film, const Observations& observations, int from,
                        int to) {
  std::vector<double> values;
  for (int step = std::max(0, from); step < std::min(film.steps(), to); ++step)
    values.push_back(observations.frames[film.frames[step]].sharpness);
  return median(std::move(values));
}

TracePoint found_point(const FilmDetections& film, const FrameObservation& frame,
                       const Detection& one, bool blurred) {
  const auto& seen = frame.sightings[one.sighting];
  TracePoint point;
  point.frame = frame.frame;
  point.time_min = frame.time_min;
  point.found = true;
  point.sighting = one.sighting;
  point.x_px = seen.x_px;
  point.y_px = seen.y_px;
  point.x_um = one.place_um.x;
  point.y_um = one.place_um.y;
  point.area_um2 = seen.area_px * film.pixel_um * film.pixel_um;
  point.radius_um = one.radius_um;
  point.brightness = seen.brightness;
  point.brightness_variance = seen.brightness_variance;
  point.cytoplasm = seen.cytoplasm;
  point.integrated = seen.integrated;
  point.doubtful = seen.touches_border || seen.saturated || seen.split || blurred;
  return point;
}

/// Places between two sightings of a nucleus.
class Between {
 public:
  Between(const FilmDetections& film, const Flow& flow, const Detection& from, const Detection& to)
      : film_(film), flow_(flow), from_(from), to_(to) {
    const Point moved = flow.shift(from.place_um, from.step, to.step);
    rest_ = to.place_um - from.place_um - moved;
  }

  /// `step`: the last usable one not after the frame, and before the later sighting's.
  Point at(int step, double time_min) const {
    const Point before = flow_.shift(from_.place_um, from_.step, step);
    const Point after = flow_.shift(from_.place_um, from_.step, step + 1);
    return from_.place_um + before +
           share(film_.time_min[step], film_.time_min[step + 1], time_min) * (after - before) +
           share(film_.time_min[from_.step], film_.time_min[to_.step], time_min) * rest_;
  }

 private:
  static double share(double start, double end, double at) {
    return std::clamp((at - start) / (end - start), 0.0, 1.0);
  }

  const FilmDetections& film_;
  const Flow& flow_;
  const Detection& from_;
  const Detection& to_;
  Point rest_;
};

TracePoint missing_point(const FilmDetections& film, const FrameObservation& frame, Point shift_px,
                         Point place, double radius_um, bool doubtful) {
  TracePoint point;
  point.frame = frame.frame;
  point.time_min = frame.time_min;
  point.x_um = place.x;
  point.y_um = place.y;
  point.x_px = place.x / film.pixel_um + shift_px.x;
  point.y_px = place.y / film.pixel_um + shift_px.y;
  point.radius_um = radius_um;
  point.doubtful = doubtful;
  return point;
}

}  // namespace

std::vector<bool> out_of_focus(const FilmDetections& film, const Observations& observations) {
  std::vector<bool> blurred;
  for (int step = 0; step < film.steps(); ++step) {
    const double own = observations.frames[film.frames[step]].sharpness;
    const double before = median_sharpness(film, observations, step - focus_window, step);
    const double after = median_sharpness(film, observations, step + 1, step + 1 + focus_window);
    const bool first = step == 0, last = step == film.steps() - 1;
    const double around = first ? after : last ? before : std::min(before, after);
    blurred.push_back(own < focus_share * around);
  }
  return blurred;
}

std::vector<TracePoint> trace_of(const FilmDetections& film, const Observations& observations,
                                 const Drift& drift, const Flow& flow,
                                 const std::vector<bool>& blurred,
                                 const std::vector<int>& detections) {
  std::vector<TracePoint> points;
  for (std::size_t i = 0; i < detections.size(); ++i) {
    const auto& one = film.all[detections[i]];
    const int frame = film.frames[one.step];
    points.push_back(found_point(film, observations.frames[frame], one, blurred[one.step]));
    if (i + 1 == detections.size()) break;
    const auto& next = film.all[detections[i + 1]];
    const Between between(film, flow, one, next);
    int step = one.step;
    for (int missing = frame + 1; missing < film.frames[next.step]; ++missing) {
      const auto& other = observations.frames[missing];
      if (film.frames[step + 1] == missing) ++step;
      const bool usable = film.frames[step] == missing;
      points.push_back(missing_point(film, other, drift_px(drift, other.frame),
                                     between.at(step, other.time_min), one.radius_um,
                                     !usable || blurred[step]));
    }
  }
  return points;
}

}  // namespace wavefount::tracking
