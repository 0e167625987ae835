#include "wavefount/synthetic/blurred_disc.h"

#include <algorithm>
#include <array>
#include <cmath>

namespace wavefount {
namespace {

// Positive nodes of the 16-point Gauss-Legendre rule and their weights.
constexpr std::array<double, 8> nodes = {0.0950125098376374, 0.2816035507792589, 0.4580167776572274,
                                         0.6178762444026438, 0.7554044083550030, 0.8656312023878318,
                                         0.9445750230732326, 0.9894009349916499};
constexpr std::array<double, 8> weights = {
    0.1894506104550685, 0.1826034150449236, 0.1691565193950025, 0.1495959888165767,
    0.1246289712555339, 0.0951585116824928, 0.0622535239386479, 0.0271524594117541};

template <typename Function>
double integrate(double from, double to, Function function) {
  const double half = (to - from) / 2;
  const double middle = (to + from) / 2;
  double sum = 0;
  for (std::size_t i = 0; i < nodes.size(); ++i)
    sum += weights[i] * (function(middle - half * nodes[i]) + function(middle + half * nodes[i]));
  return sum * half;
}

template <std::size_t size>
double polynomial(const std::array<double, size>& coefficients, double x) {
  double value = 0;
  for (std::size_t i = size; i-- > 0;) value = value * x + coefficients[i];
  return value;
}

constexpr double bessel_switch = 3.75;

}  // namespace

double scaled_bessel_i0(double x) {
  if (x < bessel_switch) {
    const double t = x / bessel_switch;
    constexpr std::array<double, 7> c = {1,         3.5156229, 3.0899424, 1.2067492,
                                         0.2659732, 0.0360768, 0.0045813};
    return std::exp(-x) * polynomial(c, t * t);
  }
  constexpr std::array<double, 9> c = {0.39894228,  0.01328592,  0.00225319,
                                       -0.00157565, 0.00916281,  -0.02057706,
                                       0.02635537,  -0.01647633, 0.00392377};
  return polynomial(c, bessel_switch / x) / std::sqrt(x);
}

double scaled_bessel_i1(double x) {
  if (x < bessel_switch) {
    const double t = x / bessel_switch;
    constexpr std::array<double, 7> c = {0.5,        0.87890594, 0.51498869, 0.15084934,
                                         0.02658733, 0.00301532, 0.00032411};
    return std::exp(-x) * x * polynomial(c, t * t);
  }
  constexpr std::array<double, 9> c = {0.39894228,  -0.03988024, -0.00362018,
                                       0.00163801,  -0.01031555, 0.02282967,
                                       -0.02895312, 0.01787654,  -0.00420059};
  return polynomial(c, bessel_switch / x) / std::sqrt(x);
}

double BlurredDisc::at(double distance_um) const {
  constexpr double reach = 6;  // standard deviations: 1e-8 of the light lies beyond
  const double from = std::max(0.0, distance_um - reach * sigma_um);
  const double to = std::min(radius_um, distance_um + reach * sigma_um);
  if (from >= to) return 0;
  const double variance = sigma_um * sigma_um;
  const auto density = [&](double r) {
    const double gap = (distance_um - r) / sigma_um;
    const double share = r / radius_um;
    return (1 - dome * share * share) * r / variance * std::exp(-gap * gap / 2) *
           scaled_bessel_i0(distance_um * r / variance);
  };
  const double middle = (from + to) / 2;
  return (integrate(from, middle, density) + integrate(middle, to, density)) / (1 - dome / 2);
}

double share_left_in_disc(double tau) {
  const double x = 1 / (2 * tau);
  return 1 - scaled_bessel_i0(x) - scaled_bessel_i1(x);
}

RadialTable::RadialTable(double reach_um) : reach_um_(reach_um), values_(129) {
  inverse_step_ = static_cast<double>(values_.size() - 1) / reach_um;
}

void RadialTable::add(const BlurredDisc& disc, double weight) {
  for (std::size_t i = 0; i < values_.size(); ++i)
    values_[i] += weight * disc.at(static_cast<double>(i) / inverse_step_);
}

}  // namespace wavefount
