#include "wavefount/kinetics/blur.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <numbers>
#include <vector>

#include "wavefount/core/robust.h"

namespace wavefount {

namespace {

// Below this the outline itself follows the blur, not the nucleus: such frames are left out.
constexpr double lowest_recovery = 0.7;
// Points dimmer than this many standard deviations have no usable outline.
constexpr double lowest_signal_to_noise = 8;
// A loss below this many standard errors is none: correcting for noise would add some.
constexpr double significance = 3;
constexpr int size_classes = 12;
constexpr std::size_t fewest_in_class = 8;

struct SizeClass {
  std::vector<double> inverse_radius, inside;
};

bool usable(const TracePoint& p) {
  return p.found && !p.doubtful && p.radius_um > 0 && p.area_um2 > 0 && p.brightness > 0 &&
         p.integrated > 0 &&
         p.brightness * p.brightness >
             lowest_signal_to_noise * lowest_signal_to_noise * p.brightness_variance;
}

std::vector<const TracePoint*> usable_points(const Nuclei& nuclei) {
  std::vector<const TracePoint*> points;
  for (const auto& nucleus : nuclei.nuclei)
    for (const auto& point : nucleus.points)
      if (usable(point)) points.push_back(&point);
  return points;
}

// Median of one class of sizes with its standard error.
struct ClassMedian {
  double inverse_radius = 0, share_inside = 0, se = 0;
};

std::vector<ClassMedian> class_medians(const std::map<int, SizeClass>& classes) {
  std::vector<ClassMedian> medians;
  for (const auto& [at, own] : classes) {
    if (own.inside.size() < fewest_in_class) continue;
    // π/2: variance of a median over that of a mean, for normal data.
    const double se = robust_sd(own.inside) * std::sqrt(std::numbers::pi / 2) /
                      std::sqrt(static_cast<double>(own.inside.size()));
    medians.push_back({median(own.inverse_radius), median(own.inside), std::max(se, 1e-4)});
  }
  return medians;
}

// Weighted straight line share_inside = whole · (1 − loss / radius).
Blur loss_of(const std::vector<ClassMedian>& medians) {
  double s = 0, sx = 0, sy = 0, sxx = 0, sxy = 0;
  for (const auto& m : medians) {
    const double w = 1 / (m.se * m.se);
    s += w;
    sx += w * m.inverse_radius;
    sy += w * m.share_inside;
    sxx += w * m.inverse_radius * m.inverse_radius;
    sxy += w * m.inverse_radius * m.share_inside;
  }
  const double spread = sxx - sx * sx / s;
  if (!(spread > 0)) return {};
  const double slope = (sxy - sx * sy / s) / spread;
  const double whole = (sy - slope * sx) / s;
  const bool significant = slope < -significance / std::sqrt(spread);
  if (!(whole > 0) || !significant) return {};
  return {-slope / whole, 1 / (std::sqrt(spread) * whole)};
}

}  // namespace

double Blur::recovery(double radius_um) const {
  if (loss_um <= 0) return 1;
  if (radius_um <= 0) return 0;
  const double share = 1 - loss_um / radius_um;
  return share >= lowest_recovery ? share : 0;
}

Blur estimate_blur(const Nuclei& nuclei) {
  const auto points = usable_points(nuclei);
  // The area of a pixel is a constant factor on the ratio and cancels in the fit.
  std::vector<double> radii, ratios;
  for (const auto* p : points) {
    radii.push_back(p->radius_um);
    ratios.push_back(p->brightness * p->area_um2 / p->integrated);
  }
  if (radii.size() < fewest_in_class * 3) return {};
  const double low = 1 / quantile(radii, 0.98), high = 1 / quantile(radii, 0.02);
  if (!(high > 1.15 * low)) return {};
  std::map<int, SizeClass> classes;
  for (std::size_t i = 0; i < radii.size(); ++i) {
    const double at = (1 / radii[i] - low) / (high - low);
    if (at < 0 || at > 1) continue;
    auto& own = classes[std::min(size_classes - 1, static_cast<int>(at * size_classes))];
    own.inverse_radius.push_back(1 / radii[i]);
    own.inside.push_back(ratios[i]);
  }
  const auto medians = class_medians(classes);
  return medians.size() < 3 ? Blur{} : loss_of(medians);
}

}  // namespace wavefount
