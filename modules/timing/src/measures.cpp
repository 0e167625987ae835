#include "wavefount/timing/measures.h"

#include <algorithm>
#include <cmath>
#include <vector>

#include "wavefount/core/robust.h"

namespace wavefount {

namespace {

// Few enough to be the place at entry, enough that one bad centroid does not move it.
constexpr std::size_t place_points = 5;

// Highest running median of three: one bad frame makes no peak.
double peak_of(const std::vector<double>& values) {
  if (values.size() < 3)
    return values.empty() ? 0 : *std::max_element(values.begin(), values.end());
  double highest = -INFINITY;
  for (std::size_t i = 1; i + 1 < values.size(); ++i)
    highest = std::max(highest, median({values[i - 1], values[i], values[i + 1]}));
  return highest;
}

std::vector<const TracePoint*> found_points(const Interphase& interphase, const Nucleus& nucleus,
                                            bool doubtful_too) {
  std::vector<const TracePoint*> points;
  for (const auto& p : nucleus.points)
    if (p.found && (doubtful_too || !p.doubtful) && p.frame >= interphase.first_frame &&
        p.frame <= interphase.last_frame && std::isfinite(p.brightness))
      points.push_back(&p);
  return points;
}

Point place_of(const std::vector<const TracePoint*>& points) {
  std::vector<double> x, y;
  const std::size_t from = points.size() > place_points ? points.size() - place_points : 0;
  for (std::size_t i = from; i < points.size(); ++i) {
    x.push_back(points[i]->x_um);
    y.push_back(points[i]->y_um);
  }
  return {median(std::move(x)), median(std::move(y))};
}

}  // namespace

void measure_interphase(Interphase& interphase, const Nucleus& nucleus, const CameraModel* camera) {
  const auto all = found_points(interphase, nucleus, true);
  interphase.place_um = place_of(all);
  auto points = found_points(interphase, nucleus, false);
  if (points.empty()) points = all;
  std::vector<double> brightness, radius, ratio;
  double sum = 0;
  for (const auto* p : points) {
    brightness.push_back(p->brightness);
    radius.push_back(p->radius_um);
    sum += p->brightness;
    const double cytoplasm = camera ? p->cytoplasm - camera->dark_offset_counts : 0;
    if (cytoplasm > 0) ratio.push_back((p->brightness + cytoplasm) / cytoplasm);
  }
  interphase.brightness_mean = points.empty() ? 0 : sum / static_cast<double>(points.size());
  interphase.brightness_peak = peak_of(brightness);
  interphase.radius_um = peak_of(radius);
  if (camera && camera->offset_given && !ratio.empty()) interphase.nc_ratio_peak = peak_of(ratio);
}

}  // namespace wavefount
