#include "wavefount/synthetic/counter_random.h"

#include <cmath>

namespace wavefount {
namespace {

double tail_quantile(double share) {
  const double q = std::sqrt(-2 * std::log(share));
  return (((((-7.784894002430293e-03 * q - 3.223964580411365e-01) * q - 2.400758277161838e+00) * q -
            2.549732539343734e+00) *
               q +
           4.374664141464968e+00) *
              q +
          2.938163982698783e+00) /
         ((((7.784695709041462e-03 * q + 3.224671290700398e-01) * q + 2.445134137142996e+00) * q +
           3.754408661907416e+00) *
              q +
          1);
}

double central_quantile(double share) {
  const double q = share - 0.5;
  const double r = q * q;
  return (((((-3.969683028665376e+01 * r + 2.209460984245205e+02) * r - 2.759285104469687e+02) * r +
            1.383577518672690e+02) *
               r -
           3.066479806614716e+01) *
              r +
          2.506628277459239e+00) *
         q /
         (((((-5.447609879822406e+01 * r + 1.615858368580409e+02) * r - 1.556989798598866e+02) * r +
            6.680131188771972e+01) *
               r -
           1.328068155288572e+01) *
              r +
          1);
}

}  // namespace

CounterRandom::CounterRandom(std::uint64_t seed, std::uint64_t stream)
    : key_(mixed(seed + 0x9e3779b97f4a7c15ULL) ^ mixed(stream * 0xd1342543de82ef95ULL + 1)) {}

double CounterRandom::uniform(std::uint64_t counter) const {
  return (static_cast<double>(bits(counter) >> 11) + 0.5) * 0x1p-53;
}

double CounterRandom::normal(std::uint64_t counter) const {
  return normal_quantile(uniform(counter));
}

double normal_quantile(double share) {
  constexpr double tail = 0.02425;  // where Acklam's two approximations meet
  if (share < tail) return tail_quantile(share);
  if (share > 1 - tail) return -tail_quantile(1 - share);
  return central_quantile(share);
}

}  // namespace wavefount
