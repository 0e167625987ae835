#include "lay_tubes.h"

#include <algorithm>
#include <cmath>

namespace wavefount {
namespace {

constexpr double beyond_um = 400;  // how far an open tube goes on outside the image

struct Course {
  double middle_x = 0, middle_y = 0, length = 0, slope = 0, bend = 0;
  Point at(double x) const {
    const double share = 2 * (x - middle_x) / length;
    return {x, middle_y + slope * (x - middle_x) + bend * (0.5 - share * share)};
  }
  Point normal(double x) const {
    const double rise = slope - 8 * bend * (x - middle_x) / (length * length);
    const double norm = std::hypot(1.0, rise);
    return {-rise / norm, 1 / norm};
  }
};

double extra_height(const SceneRecipe& recipe) {
  const double slope = std::tan(recipe.tilt_degrees * M_PI / 180);
  return std::abs(slope) * recipe.view_um + std::abs(recipe.bend_um);
}

Polygon outline_of(const Course& course, const std::vector<double>& stations, double half_width) {
  Polygon outline;
  for (const double x : stations) {
    const auto p = course.at(x);
    const auto n = course.normal(x);
    outline.push_back({p.x - half_width * n.x, p.y - half_width * n.y});
  }
  for (std::size_t i = stations.size(); i-- > 0;) {
    const auto p = course.at(stations[i]);
    const auto n = course.normal(stations[i]);
    outline.push_back({p.x + half_width * n.x, p.y + half_width * n.y});
  }
  return outline;
}

std::vector<double> stations_between(double from, double to, bool straight) {
  const int count = straight ? 1 : 40;
  std::vector<double> stations;
  for (int i = 0; i <= count; ++i) stations.push_back(from + (to - from) * i / count);
  return stations;
}

Tube make_tube(const SceneRecipe& recipe, int index, double middle_y) {
  Tube tube;
  tube.index = index;
  tube.measured = true;
  tube.width_um = recipe.tube_width_um;
  tube.left_end = recipe.left_end;
  tube.right_end = recipe.right_end;
  const double from = recipe.left_end == Boundary::closed ? recipe.margin_um : 0;
  const double to = recipe.view_um - (recipe.right_end == Boundary::closed ? recipe.margin_um : 0);
  const Course course{recipe.view_um / 2, middle_y, recipe.view_um,
                      std::tan(recipe.tilt_degrees * M_PI / 180), recipe.bend_um};
  for (const double x : stations_between(from, to, recipe.bend_um == 0))
    tube.axis_um.push_back(course.at(x));
  for (std::size_t i = 0; i + 1 < tube.axis_um.size(); ++i)
    tube.length_um += std::hypot(tube.axis_um[i + 1].x - tube.axis_um[i].x,
                                 tube.axis_um[i + 1].y - tube.axis_um[i].y);
  const double outer_from = recipe.left_end == Boundary::closed ? from : from - beyond_um;
  const double outer_to = recipe.right_end == Boundary::closed ? to : to + beyond_um;
  tube.outline_um = outline_of(course, stations_between(outer_from, outer_to, recipe.bend_um == 0),
                               recipe.tube_width_um / 2);
  return tube;
}

}  // namespace

void lay_tubes(const SceneRecipe& recipe, Scene& scene) {
  const double pitch = recipe.tube_width_um + recipe.gap_um;
  const double height =
      recipe.tubes * pitch - recipe.gap_um + 2 * recipe.margin_um + extra_height(recipe);
  scene.width = static_cast<int>(std::lround(recipe.view_um / recipe.pixel_um));
  scene.height = static_cast<int>(std::lround(height / recipe.pixel_um));
  for (int i = 0; i < recipe.tubes; ++i)
    scene.tubes.push_back(
        make_tube(recipe, i, height / 2 + (i - (recipe.tubes - 1) / 2.0) * pitch));
}

}  // namespace wavefount
