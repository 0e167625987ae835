#pragma once

#include <vector>

#include "wavefount/core/film.h"

namespace wavefount {

/// Share of the content of a disc that is still inside it when it has spread by diffusion for
/// τ = D t / a² (Soumpasis 1983, read backwards): 1 − exp(−1/2τ) [I0(1/2τ) + I1(1/2τ)]. Tail 1/4τ.
double disc_share(double tau);
/// Mean over the central disc of what a sphere of the same radius held, 1 at τ = 0 (Crank 1975,
/// eq. 3.8, averaged over the section). Tail τ^(−3/2).
double sphere_share(double tau);

/// Where the content spreads.
struct Surroundings {
  Optics optics = Optics::widefield;
  double tube_width_um = 0;  ///< 0: no walls
};

/// How the envelope gives way, with one time for either.
enum class Permeabilisation { exponential, linear };

/// What the falls of one film have in common.
struct ReleaseShape {
  double diffusion_um2_per_min = 0;
  double permeabilisation_min = 0;  ///< time constant, or whole time where linear
  Permeabilisation kind = Permeabilisation::exponential;
};

/// Share of the light still in the aperture, against time since the onset: diffusion from a disc
/// whose content is let go over the permeabilisation time. Tabulated over [0, length_min].
class ReleaseCurve {
 public:
  /// `radius_um` of the aperture; `step_min` of the table.
  ReleaseCurve(const ReleaseShape& shape, const Surroundings& surroundings, double radius_um,
               double length_min, double step_min);

  /// At one time; 1 before the onset, the table's last value beyond its end.
  double at(double since_min) const;
  /// Mean over an exposure, from and to since the onset.
  double mean(double from_min, double to_min) const;
  /// Time at which half is lost; the table's end where it is not.
  double half_min() const;

 private:
  double integral(double to_min) const;

  double step_min_;
  std::vector<double> share_, integral_;
};

}  // namespace wavefount
