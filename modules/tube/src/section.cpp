#include "wavefount/tube/section.h"

#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

namespace wavefount::tube {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
/// A term must take this share of the misfit away: noise and small unevenness do not.
constexpr double worth_share = 0.4;
/// Farthest that the edge is looked for, pixels; more, and the half-height position means nothing.
constexpr double farthest_px = 9;
/// Misfit of a plain step below which nothing is to be explained: 0.7 % of the contrast.
constexpr double good_deviation = 0.007;

struct Terms {
  bool chord = false;
  bool line = false;
};

struct Trial {
  double edge = 0, blur = 1, line_width = 1;
};

double step_down(double x) {
  return 0.5 * std::erfc(x / std::numbers::sqrt2);
}

/// Chord of a circle around the axis, blurred: a sum over a few places of the Gaussian.
double blurred_chord(double from_axis, double radius, double blur) {
  constexpr int places = 13;
  double sum = 0;
  double total = 0;
  for (int k = 0; k < places; ++k) {
    const double z = -3 + 6.0 * k / (places - 1);
    const double weight = std::exp(-0.5 * z * z);
    const double u = (from_axis + z * blur) / radius;
    sum += weight * std::sqrt(std::max(0.0, 1 - u * u));
    total += weight;
  }
  return sum / total;
}

class SectionFit {
 public:
  SectionFit(const EdgeProfile& profile, Terms terms) : profile_(profile), terms_(terms) {}

  /// Coarse grid over edge, blur and line width, then finer ones around the best.
  void run() {
    double centre = 0;
    double span = farthest_px;
    for (double edge_step = 0.75; edge_step > 0.02; edge_step /= 4) {
      for (double edge = centre - span; edge <= centre + span + 1e-9; edge += edge_step)
        try_edge(edge);
      centre = best_.edge;
      span = edge_step;
    }
  }

  double misfit() const { return misfit_; }
  double edge() const { return best_.edge; }

 private:
  void try_edge(double edge) {
    for (double blur = 0.4; blur < 4.5; blur *= 1.35) {
      if (!terms_.line) {
        compare({edge, blur, 1});
        continue;
      }
      for (double width = 0.7; width < 9; width *= 1.35) compare({edge, blur, width});
    }
  }

  void compare(const Trial& trial) {
    const double here = misfit_of(trial);
    if (here >= misfit_) return;
    misfit_ = here;
    best_ = trial;
  }

  double misfit_of(const Trial& trial) const {
    Eigen::Matrix4d normal = Eigen::Matrix4d::Zero();
    Eigen::Vector4d right = Eigen::Vector4d::Zero();
    double squares = 0;
    const double axis = profile_.half_width.value_or(0);
    for (std::size_t i = 0; i < profile_.values.size(); ++i) {
      const double at = profile_.first + static_cast<double>(i) * profile_.step;
      const double away = (at - trial.edge) / trial.line_width;
      const Eigen::Vector4d terms(
          1, step_down((at - trial.edge) / trial.blur),
          terms_.chord ? blurred_chord(at + axis, axis + trial.edge, trial.blur) : 0,
          terms_.line ? std::exp(-0.5 * away * away) : 0);
      normal += terms * terms.transpose();
      right += profile_.values[i] * terms;
      squares += profile_.values[i] * profile_.values[i];
    }
    if (!terms_.chord) normal(2, 2) = 1;
    if (!terms_.line) normal(3, 3) = 1;
    const Eigen::Vector4d heights = normal.ldlt().solve(right);
    constexpr double least = -0.02;  // light is never negative; noise may be
    if (heights[1] < least || heights[2] < least || heights[3] < least) return infinity;
    if (heights[1] + heights[2] <= 0) return infinity;
    return std::max(0.0, squares - heights.dot(right));
  }

  const EdgeProfile& profile_;
  Terms terms_;
  Trial best_;
  double misfit_ = infinity;
};

}  // namespace

double edge_offset(const EdgeProfile& profile) {
  if (profile.values.size() < 12) return 0;
  SectionFit plain(profile, {});
  plain.run();
  const double good = good_deviation * good_deviation * static_cast<double>(profile.values.size());
  double edge = 0;
  double left = plain.misfit();
  for (const Terms terms : {Terms{true, false}, Terms{false, true}, Terms{true, true}}) {
    if (left <= good) break;
    if (terms.chord && !(profile.half_width.value_or(0) > 2 * farthest_px)) continue;
    SectionFit fit(profile, terms);
    fit.run();
    if (fit.misfit() > (1 - worth_share) * left) continue;
    left = fit.misfit();
    edge = fit.edge();
  }
  return std::abs(edge) < farthest_px ? edge : 0;
}

}  // namespace wavefount::tube
