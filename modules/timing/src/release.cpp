#include "wavefount/timing/release.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <functional>
#include <map>
#include <memory>
#include <mutex>
#include <numbers>
#include <tuple>

namespace wavefount {

namespace {

constexpr double pi = std::numbers::pi;

// Both shares over log τ, in steps far finer than their bend, since a film needs them a million
// times.
class ShareTable {
 public:
  explicit ShareTable(const std::function<double(double)>& share) {
    for (int i = 0; i < count; ++i) values_[i] = share(std::exp(lowest + i * step));
  }

  double at(double tau) const {
    if (tau <= 0) return 1;
    const double place = (std::log(tau) - lowest) / step;
    // Below the table the loss goes with √τ; above it with the tail's own power.
    if (place <= 0) return 1 - (1 - values_[0]) * std::sqrt(tau / std::exp(lowest));
    if (place >= count - 1) {
      const double ratio = values_[count - 1] / values_[count - 2];
      if (!(ratio > 0 && ratio < 1)) return 0;
      const double power = std::log(ratio) / step;
      return values_[count - 1] * std::exp(power * (place - (count - 1)) * step);
    }
    const int below = static_cast<int>(place);
    return values_[below] + (place - below) * (values_[below + 1] - values_[below]);
  }

 private:
  static constexpr int count = 1200;
  static constexpr double lowest = -14;  // τ = 8e-7
  static constexpr double step = 0.02;   // to τ = 2e4

  std::array<double, count> values_{};
};

// Concentration at distance ρ from the centre of a unit sphere, both in units of its radius.
double sphere_concentration(double rho, double tau) {
  const double spread = 2 * std::sqrt(tau);
  const double in = (1 - rho) / spread, out = (1 + rho) / spread;
  const double edges = 0.5 * (std::erf(in) + std::erf(out));
  // The quotient by ρ cancels badly near the centre: its limit there.
  if (rho < 1e-3 * std::min(1.0, spread))
    return std::erf(1 / spread) - 2 / (std::sqrt(pi) * spread) * std::exp(-1 / (spread * spread));
  return edges - std::sqrt(tau / pi) / rho * (std::exp(-in * in) - std::exp(-out * out));
}

/// Bessel functions of the ring's Hankel integral over k, which do not depend on τ.
class RingIntegral {
 public:
  RingIntegral(double from, double to) {
    for (int i = 1; i <= count; ++i) {
      const double k = step * i;
      const double ring = to * std::cyl_bessel_j(1, k * to) - from * std::cyl_bessel_j(1, k * from);
      kernel_[i - 1] = 2 / (to * to - from * from) * std::cyl_bessel_j(1, k) * ring / k;
    }
  }

  double at(double tau) const {
    double sum = 0;
    for (int i = 1; i <= count; ++i) {
      const double exponent = step * i * (step * i) * tau;
      if (exponent > 40) break;
      sum += kernel_[i - 1] * std::exp(-exponent);
    }
    return sum * step;
  }

 private:
  // The kernel turns over with period 2π/(1 + to); beyond k = 80 nothing is left at τ = 0.006.
  static constexpr double step = 0.02;
  static constexpr int count = 4000;

  std::array<double, count> kernel_{};
};

/// Before this τ nothing has reached the ring; after the later one two terms of the series in 1/τ
/// do.
constexpr double ring_before = 0.006;
constexpr double ring_after = 30;

std::function<double(double)> share_of(const Surroundings& where) {
  const double from = where.ring_from;
  const double to = where.ring_to;
  const bool ring = to > from && from > 0;
  if (where.optics == Optics::sectioned) {
    if (!ring) return sphere_share;
    return [=](double tau) { return sphere_share(tau) - sphere_ring_share(tau, from, to); };
  }
  if (!ring) return disc_share;
  const auto integral = std::make_shared<RingIntegral>(from, to);
  return [=](double tau) {
    if (tau < ring_before) return disc_share(tau);
    if (tau > ring_after) return ((from * from + to * to) / 2 - 0.5) / (16 * tau * tau);
    return disc_share(tau) - integral->at(tau);
  };
}

/// Tables are made once for each kind of surroundings; films are few kinds.
const ShareTable& table_for(const Surroundings& where) {
  static std::mutex mutex;
  static std::map<std::tuple<Optics, double, double>, std::unique_ptr<ShareTable>> tables;
  const std::lock_guard guard(mutex);
  auto& table = tables[{where.optics, where.ring_from, where.ring_to}];
  if (!table) table = std::make_unique<ShareTable>(share_of(where));
  return *table;
}

// What walls throw back: images of the source, one tube width apart, each seen as a point source.
// Turns the 1/t tail into t^(−1/2) once the spread exceeds the width.
double wall_share(double tau, double widths) {
  double sum = 0;
  for (int image = 1; image < 200; ++image) {
    const double exponent = image * image * widths * widths / (4 * tau);
    if (exponent > 30) break;
    sum += 2 * std::exp(-exponent);
  }
  return sum / (4 * tau);
}

}  // namespace

double disc_share(double tau) {
  if (tau <= 0) return 1;
  const double x = 1 / (2 * tau);
  if (x > 300) {
    // Asymptotic series of exp(−x)(I0 + I1) (Abramowitz & Stegun 9.7.1).
    const double u = 1 / (8 * x);
    return 1 - (2 - 2 * u - 3 * u * u) / std::sqrt(2 * pi * x);
  }
  return 1 - std::exp(-x) * (std::cyl_bessel_i(0, x) + std::cyl_bessel_i(1, x));
}

double sphere_share(double tau) {
  if (tau <= 0) return 1;
  // Loss through a plane edge; the error is of order τ.
  if (tau < 2e-5) return 1 - 2 * std::sqrt(tau / pi);
  // Simpson over the area of the disc, s = ρ²; the edge's layer is √τ wide.
  constexpr int intervals = 1000;
  double sum = 0;
  for (int i = 0; i <= intervals; ++i) {
    const double s = static_cast<double>(i) / intervals;
    const double weight = i == 0 || i == intervals ? 1 : (i % 2 == 1 ? 4 : 2);
    sum += weight * sphere_concentration(std::sqrt(s), tau);
  }
  return sum / (3.0 * intervals);
}

double disc_ring_share(double tau, double from, double to) {
  return tau < ring_before ? 0 : RingIntegral(from, to).at(tau);
}

double sphere_ring_share(double tau, double from, double to) {
  if (tau < ring_before) return 0;
  // Simpson over the area of the ring, s = ρ².
  constexpr int intervals = 200;
  double sum = 0;
  for (int i = 0; i <= intervals; ++i) {
    const double s = from * from + (to * to - from * from) * i / intervals;
    const double weight = i == 0 || i == intervals ? 1 : (i % 2 == 1 ? 4 : 2);
    sum += weight * sphere_concentration(std::sqrt(s), tau);
  }
  return sum / (3.0 * intervals);
}

ReleaseCurve::ReleaseCurve(const ReleaseShape& shape, const Surroundings& surroundings,
                           double radius_um, double length_min, double step_min)
    : step_min_(step_min) {
  const auto count = static_cast<std::size_t>(std::ceil(length_min / step_min)) + 2;
  const auto& table = table_for(surroundings);
  const double per_min = shape.diffusion_um2_per_min / (radius_um * radius_um);
  const double widths = surroundings.tube_width_um / radius_um;
  const bool walls = surroundings.tube_width_um > 0 && surroundings.optics == Optics::widefield &&
                     surroundings.ring_to <= 0;
  std::vector<double> spread(count, 1.0);
  for (std::size_t i = 1; i < count; ++i) {
    const double tau = per_min * step_min * static_cast<double>(i);
    spread[i] = std::min(1.0, table.at(tau) + (walls ? wall_share(tau, widths) : 0));
  }
  share_ = std::move(spread);
  const double time = shape.permeabilisation_min;
  if (time > 0 && shape.kind == Permeabilisation::exponential) {
    // d share / dt = (spread − share) / time: the exact step for a spread linear in between.
    const double decay = std::exp(-step_min / time);
    const double rise = 1 - (1 - decay) * time / step_min;
    double before = share_[0], value = share_[0];
    for (std::size_t i = 1; i < count; ++i) {
      const double now = share_[i];
      value = decay * value + rise * now + (1 - decay - rise) * before;
      before = now;
      share_[i] = value;
    }
  }
  const auto integrate = [&] {
    integral_.assign(count, 0.0);
    for (std::size_t i = 1; i < count; ++i)
      integral_[i] = integral_[i - 1] + 0.5 * step_min * (share_[i - 1] + share_[i]);
  };
  integrate();
  if (time > 0 && shape.kind == Permeabilisation::linear) {
    std::vector<double> released(count);
    for (std::size_t i = 0; i < count; ++i) {
      const double now = step_min * static_cast<double>(i);
      released[i] = (integral(now) - integral(now - time)) / time;
    }
    share_ = std::move(released);
    integrate();
  }
}

double ReleaseCurve::at(double since_min) const {
  if (since_min <= 0) return 1;
  const double place = since_min / step_min_;
  const auto below = static_cast<std::size_t>(place);
  if (below + 1 >= share_.size()) return share_.back();
  return share_[below] + (place - static_cast<double>(below)) * (share_[below + 1] - share_[below]);
}

double ReleaseCurve::integral(double to_min) const {
  if (to_min <= 0) return to_min;
  const double place = to_min / step_min_;
  const auto below = static_cast<std::size_t>(place);
  if (below + 1 >= share_.size())
    return integral_.back() +
           share_.back() * (to_min - step_min_ * static_cast<double>(share_.size() - 1));
  const double part = place - static_cast<double>(below);
  const double start = share_[below];
  return integral_[below] + part * step_min_ * (start + 0.5 * part * (share_[below + 1] - start));
}

double ReleaseCurve::mean(double from_min, double to_min) const {
  if (to_min - from_min < 0.05 * step_min_) return at(0.5 * (from_min + to_min));
  return (integral(to_min) - integral(from_min)) / (to_min - from_min);
}

double ReleaseCurve::half_min() const {
  for (std::size_t i = 1; i < share_.size(); ++i)
    if (share_[i] <= 0.5) {
      const double part = (share_[i - 1] - 0.5) / (share_[i - 1] - share_[i]);
      return step_min_ * (static_cast<double>(i - 1) + part);
    }
  return step_min_ * static_cast<double>(share_.size() - 1);
}

}  // namespace wavefount
