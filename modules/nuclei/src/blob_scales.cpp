#include "wavefount/nuclei/blob_scales.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace wavefount::nuclei {
namespace {

/// Below this the five-point Laplacian of a sampled Gaussian is no longer isotropic.
constexpr double finest_sigma_px = 0.9;
/// From here on, in its own pixels, a scale can be halved without aliasing (power at the new
/// Nyquist frequency below exp(−π²σ²/4) = 2e-7).
constexpr double halving_sigma = 2.5;
/// Taps reach this many standard deviations; what is left out is 1e-4 of the light.
constexpr double reach = 3.7;

std::vector<double> gaussian(double sigma) {
  const int half = std::max(1, static_cast<int>(std::ceil(reach * sigma)));
  std::vector<double> taps;
  double sum = 0;
  for (int i = -half; i <= half; ++i) {
    taps.push_back(std::exp(-0.5 * i * i / (sigma * sigma)));
    sum += taps.back();
  }
  for (double& tap : taps) tap /= sum;
  return taps;
}

/// `smoothing`, then `taps` spaced `step` apart.
std::vector<double> followed_by(const std::vector<double>& smoothing,
                                const std::vector<double>& taps, int step) {
  const auto spacing = static_cast<std::size_t>(step);
  std::vector<double> both(smoothing.size() + (taps.size() - 1) * spacing, 0.0);
  for (std::size_t i = 0; i < smoothing.size(); ++i)
    for (std::size_t j = 0; j < taps.size(); ++j) both[i + j * spacing] += smoothing[i] * taps[j];
  return both;
}

double variance_of(const std::vector<double>& kernel) {
  const double centre = static_cast<double>(kernel.size() - 1) / 2;
  double sum = 0;
  for (std::size_t i = 0; i < kernel.size(); ++i) {
    const double distance = static_cast<double>(i) - centre;
    sum += kernel[i] * distance * distance;
  }
  return sum;
}

/// Square root of the sum of squares of σ² (g″(x) g(y) + g(x) g″(y)) over all pixels.
double noise_gain_of(const std::vector<double>& smoothing, double sigma, int step) {
  const double per_step = 1.0 / (static_cast<double>(step) * step);
  const auto curved = followed_by(smoothing, {per_step, -2 * per_step, per_step}, step);
  const auto flat = followed_by(smoothing, {0, 1, 0}, step);
  double curved_curved = 0;
  double flat_flat = 0;
  double curved_flat = 0;
  for (std::size_t i = 0; i < curved.size(); ++i) {
    curved_curved += curved[i] * curved[i];
    flat_flat += flat[i] * flat[i];
    curved_flat += curved[i] * flat[i];
  }
  return sigma * sigma * std::sqrt(2 * (curved_curved * flat_flat + curved_flat * curved_flat));
}

}  // namespace

std::vector<BlobScale> plan_blob_scales(double smallest_radius_px, double largest_radius_px) {
  std::vector<BlobScale> scales;
  const double first = std::max(finest_sigma_px, smallest_radius_px / std::numbers::sqrt2);
  const double last = std::max(first, largest_radius_px / std::numbers::sqrt2);
  const int count = 1 + static_cast<int>(std::ceil(2 * std::log2(last / first) - 1e-9));
  std::vector<double> smoothing{1.0};
  int step = 1;
  for (int i = 0; i < count; ++i) {
    const double wanted = first * std::pow(2.0, 0.5 * i);
    if (i > 0 && scales.back().sigma_px / step >= halving_sigma) step *= 2;
    const double missing = wanted * wanted - variance_of(smoothing);
    const auto taps = gaussian(std::sqrt(std::max(missing, 0.25)) / step);
    smoothing = followed_by(smoothing, taps, step);
    BlobScale scale;
    scale.sigma_px = std::sqrt(variance_of(smoothing));
    scale.radius_px = scale.sigma_px * std::numbers::sqrt2;
    scale.step = step;
    scale.kernel.assign(taps.begin(), taps.end());
    scale.noise_gain = noise_gain_of(smoothing, scale.sigma_px, step);
    scales.push_back(std::move(scale));
  }
  return scales;
}

}  // namespace wavefount::nuclei
