#include "mitosis_model.h"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "wavefount/core/robust.h"

namespace wavefount::tracking {
namespace {

/// 5 to 20 min out of sight: the middle on a logarithmic scale, and a spread that holds both.
constexpr double prior_gap_min = 10;
constexpr double prior_gap_log_sd = 0.5;
/// "Near the same place, sometimes tens of µm away" at 100 to 200 µm between nuclei.
constexpr double prior_displacement_spacings = 0.12;
/// The prior weighs as much as this many observed mitoses.
constexpr double prior_weight = 4;
/// Mitosis times of one film vary by at least this much, over hours and along the tube.
constexpr double least_gap_log_sd = 0.15;
/// Degrees of freedom of the gap's tails, on the logarithmic scale.
constexpr double gap_freedom = 5;
/// Beyond so many standard deviations of the logarithm a gap is no mitosis.
constexpr double gap_reach_sd = 4;
/// How far nuclei can re-form, in standard deviations of the displacement and in spacings.
constexpr double reach_sd = 8;
constexpr double reach_spacings = 1;
/// Chance that an end inside an interphase is a run of missed detections, before looking.
constexpr double missed_share = 0.02;
/// Density of the log brightness ratio of an end and an unrelated start.
constexpr double unrelated_ratio_density = 1.0 / 3;

/// −log density of Student's distribution, up to the constant of its freedom (within 0.1 of the
/// Gaussian's at five).
double student_cost(double deviation, double sd) {
  return std::log(sd * std::sqrt(2 * std::numbers::pi)) +
         (gap_freedom + 1) / 2 * std::log1p(deviation * deviation / (gap_freedom * sd * sd));
}

void set_reach(const FilmDetections& film, const LinkSettings& settings, MitosisModel& model) {
  model.reach_um = settings.reformation_um.value_or(
      std::max(reach_sd * model.displacement_um, reach_spacings * film.spacing_um));
}

double blended(double prior, double own, double count) {
  return (prior_weight * prior + count * own) / (prior_weight + count);
}

}  // namespace

double MitosisModel::longest_min() const {
  return gap_min * std::exp(std::min(gap_reach_sd * gap_log_sd, std::log(5.0)));
}

MitosisModel prior_model(const FilmDetections& film, const Evidence& evidence,
                         const LinkSettings& settings) {
  MitosisModel model;
  model.gap_min = settings.mitosis_min.value_or(prior_gap_min) + film.interval_min;
  model.gap_log_sd = prior_gap_log_sd;
  model.displacement_um = settings.reformation_um ? *settings.reformation_um / reach_sd
                                                  : prior_displacement_spacings * film.spacing_um;
  model.birth_density = 1 / (film.area_um2 * std::max(film.duration_min(), film.interval_min));
  model.false_density = std::max(evidence.false_density, model.birth_density);
  model.end_share = 0.1;
  set_reach(film, settings, model);
  return model;
}

MitosisModel fitted_model(const FilmDetections& film, const MitosisModel& prior,
                          const LinkSettings& settings, const std::vector<Rebirth>& unrivalled) {
  MitosisModel model = prior;
  const double count = static_cast<double>(unrivalled.size());
  if (unrivalled.empty()) return model;
  std::vector<double> log_gaps, squares;
  for (const auto& one : unrivalled) {
    log_gaps.push_back(std::log(one.gap_min));
    squares.push_back(one.displacement_um * one.displacement_um);
  }
  const double centre = median(log_gaps);
  model.gap_min = std::exp(blended(std::log(prior.gap_min), centre, count));
  const double own = std::max(robust_sd(log_gaps), least_gap_log_sd);
  const double frames = film.interval_min / model.gap_min;
  model.gap_log_sd = std::sqrt(
      blended(prior.gap_log_sd * prior.gap_log_sd, own * own + frames * frames / 6, count));
  // The median of a squared distance in the plane is 2 ln 2 times the variance of an axis.
  const double variance = median(squares) / (2 * std::numbers::ln2);
  model.displacement_um =
      std::sqrt(blended(prior.displacement_um * prior.displacement_um, variance, count));
  set_reach(film, settings, model);
  return model;
}

double mitosis_odds(const MitosisModel& model, double gap_min, double displacement_um,
                    double new_density) {
  const double deviation = std::log(gap_min / model.gap_min);
  const double fits =
      -student_cost(deviation, model.gap_log_sd) - std::log(gap_min) -
      displacement_cost(displacement_um, model.displacement_um * model.displacement_um);
  return fits - std::log(new_density) + std::log((1 - model.end_share) / model.end_share);
}

double missed_odds(const FilmDetections& film, const Motion& motion, const MitosisModel& model,
                   double gap_min, double displacement_um, double brightness_log_ratio,
                   double new_density) {
  const double steps = gap_min / film.interval_min;
  const double sd = std::hypot(0.15, motion.log_brightness_sd * steps);
  const double looks = -brightness_log_ratio * brightness_log_ratio / (2 * sd * sd) -
                       std::log(sd * std::sqrt(2 * std::numbers::pi));
  const double run_min = std::max(2 * film.interval_min, 1.0);
  const double fits = std::log(missed_share) - gap_min / run_min - std::log(run_min) + looks -
                      std::log(unrelated_ratio_density) -
                      displacement_cost(displacement_um, motion.variance(gap_min));
  return fits - std::log(new_density) - std::log(model.end_share);
}

}  // namespace wavefount::tracking
