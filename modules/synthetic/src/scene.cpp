#include "wavefount/synthetic/scene.h"

#include <algorithm>
#include <cmath>

namespace wavefount {

double SceneLife::radius_um(double time_min) const {
  const double age = std::clamp(time_min, formed_min, entry_min) - formed_min;
  return last_radius_um + (first_radius_um - last_radius_um) * std::exp(-growth_per_min * age);
}

double SceneLife::brightness(double time_min) const {
  const double time = std::min(time_min, entry_min);
  if (time < formed_min) return 0;
  const double filled = plateau * -std::expm1(-import_per_min * (time - formed_min));
  const double leaking = std::max(0.0, time - (entry_min - leak_min));
  return filled * std::exp(-leak_per_min * leaking);
}

Point SceneLife::centre_um(double time_min) const {
  const double age = time_min - formed_min;
  return {place_um.x + velocity_um_per_min.x * age, place_um.y + velocity_um_per_min.y * age};
}

double SceneNucleus::outline(double direction) const {
  const double turned = direction - angle;
  return 1 + elongation * std::cos(2 * turned) + lobes * std::cos(3 * turned);
}

Point Scene::drift_um(int frame) const {
  const auto index = static_cast<std::size_t>(frame);
  return index < nuisances.drift_um.size() ? nuisances.drift_um[index] : Point{};
}

double Scene::evenness(Point image_um) const {
  const double u = 2 * image_um.x / (pixel_um * width) - 1;
  const double v = 2 * image_um.y / (pixel_um * height) - 1;
  const double aspect = static_cast<double>(height) / width;
  const double corner = (u * u + v * v * aspect * aspect) / (1 + aspect * aspect);
  return (1 - nuisances.vignetting * corner) * (1 + nuisances.slope * (u - 1) / 2);
}

Point point_at(const Tube& tube, double along_um, double across_um) {
  const auto& axis_um = tube.axis_um;
  const bool upright = std::abs(axis_um.back().y - axis_um.front().y) >
                       std::abs(axis_um.back().x - axis_um.front().x);
  // Positive is below a lying tube and to the right of an upright one, see Tube::place.
  const double aside = upright ? -across_um : across_um;
  double left = along_um;
  std::size_t i = 0;
  double length = 0;
  for (; i + 1 < axis_um.size(); ++i) {
    length = std::hypot(axis_um[i + 1].x - axis_um[i].x, axis_um[i + 1].y - axis_um[i].y);
    if (left <= length || i + 2 == axis_um.size()) break;
    left -= length;
  }
  const Point direction{(axis_um[i + 1].x - axis_um[i].x) / length,
                        (axis_um[i + 1].y - axis_um[i].y) / length};
  return {axis_um[i].x + left * direction.x - aside * direction.y,
          axis_um[i].y + left * direction.y + aside * direction.x};
}

}  // namespace wavefount
