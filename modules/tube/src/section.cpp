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
/// Chord and line below these shares of the contrast move the half-height position by next to
/// nothing, and are what an imperfect step looks like.
constexpr double least_chord = 0.1;
constexpr double least_line = 0.08;

struct Terms {
  bool tilt = false;
  bool chord = false;
  bool line = false;
};

struct Trial {
  double edge = 0, blur = 1, line_width = 1;
  double chord = 0, line = 0;  ///< their heights, shares of the contrast
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

constexpr int term_count = 5;  ///< outside, step, tilt of the light, chord, line
using Vector = Eigen::Matrix<double, term_count, 1>;
using Matrix = Eigen::Matrix<double, term_count, term_count>;

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
  bool terms_matter() const {
    return (!terms_.chord || best_.chord >= least_chord) &&
           (!terms_.line || best_.line >= least_line);
  }

 private:
  double place(std::size_t i) const {
    return profile_.first + static_cast<double>(i) * profile_.step;
  }

  void try_edge(double edge) {
    const double axis = profile_.half_width.value_or(0);
    for (double blur = 0.4; blur < 4.5; blur *= 1.35) {
      rows_.clear();
      for (std::size_t i = 0; i < profile_.values.size(); ++i) {
        const double at = place(i);
        const double step = step_down((at - edge) / blur);
        Vector row = Vector::Zero();
        row << 1, step, terms_.tilt ? step * (at - edge) / -profile_.first : 0,
            terms_.chord ? blurred_chord(at + axis, axis + edge, blur) : 0, 0;
        rows_.push_back(row);
      }
      if (!terms_.line) {
        compare({edge, blur, 1});
        continue;
      }
      for (double width = 0.7; width < 9; width *= 1.35) compare({edge, blur, width});
    }
  }

  void compare(Trial trial) {
    if (terms_.line) {
      for (std::size_t i = 0; i < rows_.size(); ++i) {
        const double away = (place(i) - trial.edge) / trial.line_width;
        rows_[i][4] = std::exp(-0.5 * away * away);
      }
    }
    const double here = misfit_of_rows(trial);
    if (here >= misfit_) return;
    misfit_ = here;
    best_ = trial;
  }

  double misfit_of_rows(Trial& trial) const {
    Matrix normal = Matrix::Zero();
    Vector right = Vector::Zero();
    double squares = 0;
    for (std::size_t i = 0; i < rows_.size(); ++i) {
      normal.noalias() += rows_[i] * rows_[i].transpose();
      right += profile_.values[i] * rows_[i];
      squares += profile_.values[i] * profile_.values[i];
    }
    if (!terms_.tilt) normal(2, 2) = 1;
    if (!terms_.chord) normal(3, 3) = 1;
    if (!terms_.line) normal(4, 4) = 1;
    const Vector heights = normal.ldlt().solve(right);
    trial.chord = heights[3];
    trial.line = heights[4];
    constexpr double least = -0.02;  // light is never negative; noise may be
    if (heights[1] < least || heights[3] < least || heights[4] < least) return infinity;
    if (heights[1] + heights[3] <= 0) return infinity;
    return std::max(0.0, squares - heights.dot(right));
  }

  const EdgeProfile& profile_;
  Terms terms_;
  std::vector<Vector> rows_;
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
  // On an even inside a line that glows stands out above all of it.
  const bool bright_line =
      *std::max_element(profile.values.begin(), profile.values.end()) > 1 + least_line;
  constexpr Terms models[] = {{true, false, false}, {false, true, false}, {false, false, true},
                              {true, false, true},  {false, true, true},  {true, true, true}};
  for (const Terms& terms : models) {
    if (left <= good) break;
    if (terms.chord && !(profile.half_width.value_or(0) > 2 * farthest_px)) continue;
    if (terms.line && !terms.chord && !bright_line) continue;
    SectionFit fit(profile, terms);
    fit.run();
    if (fit.misfit() > (1 - worth_share) * left || !fit.terms_matter()) continue;
    left = fit.misfit();
    edge = terms.chord || terms.line ? fit.edge() : 0;
  }
  return std::abs(edge) < farthest_px ? edge : 0;
}

}  // namespace wavefount::tube
