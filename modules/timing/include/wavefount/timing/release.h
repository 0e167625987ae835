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

/// Mean over a ring around the disc (radii in units of the disc's) of what the disc held, 1 at τ =
/// 0 inside it: the Hankel integral of the disc's diffusion (Crank 1975, §3.5.2). Tail 1/4τ.
double disc_ring_share(double tau, double from, double to);
/// The same in an optical section through a sphere. Tail τ^(−3/2).
double sphere_ring_share(double tau, double from, double to);

/// Where the content spreads, and what is taken off the aperture.
struct Surroundings {
  Optics optics = Optics::widefield;
  double tube_width_um = 0;           ///< 0: no walls
  double ring_from = 0, ring_to = 0;  ///< of the ring taken off, in aperture radii; 0: none
};

/// How the envelope gives way, with one time for either.
enum class Permeabilisation { exponential, linear };

/// What the falls of one film have in common.
struct ReleaseShape {
  double diffusion_um2_per_min = 0;
  double permeabilisation_min = 0;  ///< time constant, or whole time where linear
  Permeabilisation kind = Permeabilisation::exponential;
};

/// Share of the signal that is left, against time since the onset: diffusion from a disc whose
/// content is let go over the permeabilisation time, less what of it has reached the ring. What
/// walls throw back reaches aperture and ring alike, so walls count only where no ring is taken
/// off. Tabulated over [0, length_min].
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
