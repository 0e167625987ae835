#pragma once

#include <vector>

namespace wavefount {

/// Modified Bessel function of order zero times exp(−x), x >= 0 (Abramowitz & Stegun 9.8.1, 9.8.2).
double scaled_bessel_i0(double x);
/// Modified Bessel function of order one times exp(−x), x >= 0 (Abramowitz & Stegun 9.8.3, 9.8.4).
double scaled_bessel_i1(double x);

/// A disc of light convolved with an isotropic normal distribution: a nucleus under the point
/// spread function, and the same nucleus' content while it spreads by diffusion (variance 2 D t an
/// axis).
struct BlurredDisc {
  double radius_um = 0;
  double sigma_um = 0;  ///< > 0
  double dome = 0;      ///< 0 flat; else brightness falls by this share from centre to rim

  /// Brightness at a distance from the centre, for a mean of 1 over the unblurred disc.
  double at(double distance_um) const;
};

/// Share of the content of a disc of radius a that is still inside after diffusion for t, by
/// τ = D t / a²: 1 − exp(−1/2τ) · [I0(1/2τ) + I1(1/2τ)] (integral of the diffusing disc over
/// itself; Soumpasis 1983, Biophys J 41:95, has its complement for recovery after bleaching).
double share_left_in_disc(double tau);

/// Brightness tabulated over distance, to add several discs at the price of one.
class RadialTable {
 public:
  explicit RadialTable(double reach_um);
  void add(const BlurredDisc& disc, double weight);
  double reach_um() const { return reach_um_; }
  double at(double distance_um) const {
    const double position = distance_um * inverse_step_;
    const auto knot = static_cast<std::size_t>(position);
    if (knot + 1 >= values_.size()) return 0;
    const double share = position - static_cast<double>(knot);
    return values_[knot] + share * (values_[knot + 1] - values_[knot]);
  }

 private:
  double reach_um_;
  double inverse_step_;
  std::vector<double> values_;
};

}  // namespace wavefount
