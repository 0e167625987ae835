#pragma once

#include "wavefount/core/nucleus.h"

namespace wavefount {

/// Share of a nucleus' light that blur carries over its outline: loss_um / radius. The brightness
/// inside the outline is dimmed by as much (partial volume; Hoffman, Huang & Phelps 1979). For a
/// Gaussian blur of standard deviation σ, loss_um is 0.80 σ.
struct Blur {
  double loss_um = 0;
  double se_um = 0;  ///< of the loss

  /// Factor by which brightness inside the outline is dimmed; 0 where no correction is sound.
  double recovery(double radius_um) const;
};

/// From the film's own nuclei: excess light outside the outline over whole excess light, against
/// 1/radius, robustly. Zero where it shows no such loss or too few nuclei differ in size.
Blur estimate_blur(const Nuclei& nuclei);

}  // namespace wavefount
