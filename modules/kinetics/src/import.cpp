#include "wavefount/kinetics/import.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <optional>

#include "wavefount/core/robust.h"
#include "wavefount/kinetics/filling.h"

namespace wavefount {

namespace {

// The cytoplasm that a nucleus fills from is read over this share of its points, from the first.
constexpr double early_share = 0.33;

// Dimmer than this over its noise a nucleus is outlined only where noise helps, which would bias
// the fit upwards; judged over five points, so that no point's own noise decides about it.
constexpr double lowest_signal_to_noise = 4;
constexpr std::ptrdiff_t judged_points = 5;

using Selected = std::vector<const TracePoint*>;

double last_time(const Interphase& interphase, const ImportSettings& settings) {
  if (!interphase.entry) return INFINITY;
  return interphase.entry->time_min - settings.exposure_min - settings.before_entry_min;
}

bool usable(const TracePoint& p, const Interphase& interphase, const ImportSettings& settings) {
  return p.found && !p.doubtful && p.frame >= interphase.first_frame &&
         p.frame <= interphase.last_frame && p.time_min <= last_time(interphase, settings) &&
         p.brightness_variance > 0 && std::isfinite(p.brightness) &&
         settings.blur.recovery(p.radius_um) > 0;
}

// A nucleus that fades away is filling only up to its brightest.
void cut_at_brightest(Selected& points) {
  const auto brightest = std::max_element(
      points.begin(), points.end(),
      [](const TracePoint* a, const TracePoint* b) { return a->brightness < b->brightness; });
  if (brightest != points.end()) points.erase(brightest + 1, points.end());
}

void cut_before_outlined(Selected& points) {
  const auto size = static_cast<std::ptrdiff_t>(points.size());
  std::ptrdiff_t first = 0;
  for (; first + judged_points <= size; ++first) {
    std::vector<double> ratios;
    for (auto i = first; i < first + judged_points; ++i)
      ratios.push_back(points[i]->brightness / std::sqrt(points[i]->brightness_variance));
    if (median(std::move(ratios)) >= lowest_signal_to_noise) break;
  }
  points.erase(points.begin(), points.begin() + first);
}

Selected select_points(const Nucleus& nucleus, const Interphase& interphase,
                       const ImportSettings& settings) {
  Selected points;
  for (const auto& point : nucleus.points)
    if (usable(point, interphase, settings)) points.push_back(&point);
  cut_before_outlined(points);
  if (interphase.outcome == Outcome::lost) cut_at_brightest(points);
  return points;
}

std::vector<FillingPoint> brightness_points(const Selected& points,
                                            const ImportSettings& settings) {
  std::vector<FillingPoint> result;
  for (const auto* p : points) {
    const double factor =
        settings.bleaching.correction(p->time_min) / settings.blur.recovery(p->radius_um);
    result.push_back(
        {p->time_min, p->brightness * factor, p->brightness_variance * factor * factor});
  }
  return result;
}

// Integrated light has the relative error of brightness; blur only moves it, so it needs none of
// that correction.
std::vector<FillingPoint> integrated_points(const Selected& points,
                                            const ImportSettings& settings) {
  std::vector<FillingPoint> result;
  for (const auto* p : points) {
    const double light = p->integrated * settings.bleaching.correction(p->time_min);
    const double relative = p->brightness_variance / (p->brightness * p->brightness);
    result.push_back({p->time_min, light, light * light * relative});
  }
  return result;
}

std::size_t early_count(const Selected& points) {
  const auto share = static_cast<std::size_t>(early_share * static_cast<double>(points.size()));
  return std::min(points.size(), std::max<std::size_t>(3, share));
}

std::optional<double> early_cytoplasm(const Selected& points, const CameraModel& camera,
                                      const Bleaching& bleaching) {
  if (!camera.offset_given || points.empty()) return std::nullopt;
  std::vector<double> levels;
  for (std::size_t i = 0; i < early_count(points); ++i)
    levels.push_back((points[i]->cytoplasm - camera.dark_offset_counts) *
                     bleaching.correction(points[i]->time_min));
  const double level = median(std::move(levels));
  return level > 0 ? std::optional(level) : std::nullopt;
}

// Relative error of the initial import from that of the film's blur, which all its nuclei share.
double blur_error(const Selected& points, const Blur& blur) {
  std::vector<double> errors;
  for (std::size_t i = 0; i < early_count(points); ++i)
    errors.push_back(blur.se_um / (points[i]->radius_um * blur.recovery(points[i]->radius_um)));
  return median(std::move(errors));
}

// One interphase's fit on its way to a standard error that the whole film informs.
struct Pending {
  Interphase* interphase = nullptr;
  Selected points;
  FillingFit fit;
};

void complete(const Pending& pending, const Dispersion& pooled, const CameraModel& camera,
              const ImportSettings& settings) {
  const auto& fit = pending.fit;
  const auto own = shrink_dispersion(fit.sum_of_squares, fit.freedom, pooled);
  const double inflation =
      student_factor(own.freedom) * std::sqrt(own.variance_ratio * pooled.correlation_factor);
  ImportFit import;
  import.curved = fit.curved;
  import.formed_min = fit.formed_min;
  import.initial = fit.initial;
  import.initial_se = std::hypot(std::sqrt(fit.initial_variance) * inflation,
                                 fit.initial * blur_error(pending.points, settings.blur));
  import.start_min = fit.start_min;
  import.level_at_start = fit.level_at_start;
  if (fit.curved) {
    import.rate_per_min = fit.rate_per_min;
    import.rate_se_per_min = std::sqrt(fit.rate_variance) * inflation;
    import.plateau = fit.plateau;
  }
  if (const auto level = early_cytoplasm(pending.points, camera, settings.bleaching))
    import.relative_per_min = fit.initial / *level;
  if (const auto total = fit_filling(integrated_points(pending.points, settings)))
    import.total_per_min = total->initial;
  pending.interphase->import = import;
}

// The fitted formation, kept between the nucleus' loss before and its first sighting.
void set_formation(Interphase& interphase, const Interphase* before, const Nucleus& nucleus) {
  double formed = *interphase.import->formed_min;
  for (const auto& point : nucleus.points)
    if (point.found && point.frame == interphase.first_frame)
      formed = std::min(formed, point.time_min);
  if (before && before->nucleus == interphase.nucleus && before->entry)
    formed = std::max(formed, before->entry->half_loss_min);
  interphase.formed_min = formed;
}

}  // namespace

void fit_imports(Interphases& interphases, const Nuclei& nuclei, const CameraModel& camera,
                 const ImportSettings& settings) {
  std::map<int, const Nucleus*> by_id;
  for (const auto& nucleus : nuclei.nuclei) by_id[nucleus.id] = &nucleus;
  std::vector<Pending> pending;
  std::vector<FitResiduals> residuals;
  for (auto& interphase : interphases.interphases) {
    const auto at = by_id.find(interphase.nucleus);
    if (interphase.start != Start::seen || at == by_id.end()) continue;
    auto points = select_points(*at->second, interphase, settings);
    auto fit = fit_filling(brightness_points(points, settings));
    if (!fit) continue;
    residuals.push_back(fit->residuals);
    pending.push_back({&interphase, std::move(points), std::move(*fit)});
  }
  const auto pooled = pool_dispersion(residuals);
  for (const auto& one : pending) {
    complete(one, pooled, camera, settings);
    auto& own = *one.interphase;
    const bool first = &own == &interphases.interphases.front();
    set_formation(own, first ? nullptr : &own - 1, *by_id.at(own.nucleus));
  }
}

}  // namespace wavefount
