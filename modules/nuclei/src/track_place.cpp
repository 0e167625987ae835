#include "wavefount/nuclei/track_place.h"

#include <algorithm>
#include <cmath>

#include "wavefount/core/robust.h"

namespace wavefount::nuclei {
namespace {

/// Points that a held place rests on: more would lag behind a nucleus that moves.
constexpr std::size_t held_sightings = 3;

Point middle_of(const std::vector<Point>& places) {
  std::vector<double> x;
  std::vector<double> y;
  for (const Point& place : places) {
    x.push_back(place.x);
    y.push_back(place.y);
  }
  return {median(std::move(x)), median(std::move(y))};
}

}  // namespace

TrackPlace::TrackPlace(const Nucleus& nucleus) {
  std::vector<double> radii;
  for (const TracePoint& point : nucleus.points) {
    frames_.push_back(point.frame);
    times_.push_back(point.time_min);
    places_.push_back({point.x_um, point.y_um});
    if (point.found && point.radius_um > 0) radii.push_back(point.radius_um);
  }
  if (frames_.empty()) return;
  const auto held = static_cast<std::ptrdiff_t>(std::min(held_sightings, places_.size()));
  first_ = middle_of({places_.begin(), places_.begin() + held});
  last_ = middle_of({places_.end() - held, places_.end()});
  aperture_radius_um_ = quantile(std::move(radii), 0.75);
}

Point TrackPlace::at(double time_min) const {
  if (time_min < times_.front()) return first_;
  if (time_min > times_.back()) return last_;
  const auto after = std::lower_bound(times_.begin(), times_.end(), time_min);
  const auto index = static_cast<std::size_t>(after - times_.begin());
  if (*after == time_min || index == 0) return places_[index];
  const double share = (time_min - times_[index - 1]) / (times_[index] - times_[index - 1]);
  const Point& from = places_[index - 1];
  const Point& to = places_[index];
  return {std::lerp(from.x, to.x, share), std::lerp(from.y, to.y, share)};
}

}  // namespace wavefount::nuclei
