#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <limits>

#include "wavefount/tube/border.h"

namespace wavefount::tube {
namespace {

/// A line dimmer than this share of the contrast moves the half-height position by less than a
/// tenth of its width.
constexpr double least_line_share = 0.12;

struct Shape {
  double edge, blur, line_at, line_width;
};

double step_down(double x) {
  return 0.5 * std::erfc(x / std::numbers::sqrt2);
}

/// Misfit of outside + contrast · step + line · Gaussian with the three heights fitted.
double misfit(const std::vector<double>& profile, double step, double zero, const Shape& shape) {
  Eigen::Matrix3d normal = Eigen::Matrix3d::Zero();
  Eigen::Vector3d right = Eigen::Vector3d::Zero();
  double squares = 0;
  for (std::size_t i = 0; i < profile.size(); ++i) {
    const double at = static_cast<double>(i) * step - zero;
    const double away = (at - shape.line_at) / shape.line_width;
    const Eigen::Vector3d terms(1, step_down((at - shape.edge) / shape.blur),
                                std::exp(-0.5 * away * away));
    normal += terms * terms.transpose();
    right += profile[i] * terms;
    squares += profile[i] * profile[i];
  }
  const Eigen::Vector3d heights = normal.ldlt().solve(right);
  if (heights[1] <= 0 || heights[2] < 0) return std::numeric_limits<double>::infinity();
  return squares - heights.dot(right);
}

}  // namespace

double glow_offset(const std::vector<double>& profile, double step, double zero, double inside,
                   double outside) {
  const double highest = *std::max_element(profile.begin(), profile.end());
  if (highest - inside < least_line_share * (inside - outside)) return 0;
  // The line is taken to run on the edge: the wall itself glows. Coarse grid, then finer ones.
  Shape best{0, 1, 0, 1};
  double least = std::numeric_limits<double>::infinity();
  double edge_step = 0.5;
  double centre = 0;
  double span = 6;
  for (int level = 0; level < 3; ++level) {
    for (double edge = centre - span; edge <= centre + span + 1e-9; edge += edge_step) {
      for (double blur = 0.4; blur < 4; blur *= 1.4) {
        for (double width = 0.5; width < 6; width *= 1.3) {
          const Shape shape{edge, blur, edge, width};
          const double here = misfit(profile, step, zero, shape);
          if (here >= least) continue;
          least = here;
          best = shape;
        }
      }
    }
    centre = best.edge;
    span = edge_step;
    edge_step /= 4;
  }
  return std::isfinite(least) ? -best.edge : 0;
}

}  // namespace wavefount::tube
