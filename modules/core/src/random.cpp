#include "wavefount/core/random.h"

#include <cmath>
#include <numbers>

namespace wavefount {
namespace {

constexpr std::uint64_t golden = 0x9E3779B97F4A7C15ULL;

std::uint64_t mixed(std::uint64_t value) {
  value = (value ^ (value >> 30)) * 0xBF58476D1CE4E5B9ULL;
  value = (value ^ (value >> 27)) * 0x94D049BB133111EBULL;
  return value ^ (value >> 31);
}

/// Acklam's rational approximation for 0 < share <= 0.5, relative error 1.2e-9 (coefficients from
/// memory; the Halley step that follows and the test against erfc make them uncritical).
double rough_lower_quantile(double share) {
  if (share < 0.02425) {
    const double q = std::sqrt(-2 * std::log(share));
    return (((((-7.784894002430293e-03 * q - 3.223964580411365e-01) * q - 2.400758277161838) * q -
              2.549732539343734) *
                 q +
             4.374664141464968) *
                q +
            2.938163982698783) /
           ((((7.784695709041462e-03 * q + 3.224671290700398e-01) * q + 2.445134137142996) * q +
             3.754408661907416) *
                q +
            1);
  }
  const double q = share - 0.5;
  const double r = q * q;
  return (((((-3.969683028665376e+01 * r + 2.209460984245205e+02) * r - 2.759285104469687e+02) * r +
            1.383577518672690e+02) *
               r -
           3.066479806614716e+01) *
              r +
          2.506628277459239) *
         q /
         (((((-5.447609879822406e+01 * r + 1.615858368580409e+02) * r - 1.556989798598866e+02) * r +
            6.680131188771972e+01) *
               r -
           1.328068155288572e+01) *
              r +
          1);
}

}  // namespace

std::uint64_t seed_from(std::uint64_t seed, std::string_view name) {
  std::uint64_t hash = 0xCBF29CE484222325ULL;
  for (const char c : name) hash = (hash ^ static_cast<unsigned char>(c)) * 0x100000001B3ULL;
  return mixed(hash + mixed(seed + golden));
}

std::uint64_t RandomStream::bits() {
  return mixed(state_ += golden);
}

double RandomStream::uniform() {
  return (static_cast<double>(bits() >> 12) + 0.5) * 0x1.0p-52;
}

double RandomStream::normal() {
  return normal_quantile(uniform());
}

double normal_quantile(double share) {
  if (share > 0.5) return -normal_quantile(1 - share);
  const double x = rough_lower_quantile(share);
  const double error = 0.5 * std::erfc(-x / std::numbers::sqrt2) - share;
  const double step = error * std::sqrt(2 * std::numbers::pi) * std::exp(x * x / 2);
  return x - step / (1 + x * step / 2);
}

}  // namespace wavefount
