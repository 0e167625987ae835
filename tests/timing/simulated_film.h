#pragma once

#include <functional>
#include <string>
#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/core/interphase.h"

namespace wavefount::simulated {

/// How the light goes from an aperture, against minutes since the onset; 1 at 0.
using Release = std::function<double(double)>;
/// How a nucleus fills, against minutes since formation, 0 to 1.
using Growth = std::function<double(double)>;

/// A film of aperture traces, with none of the measurement's own code in it.
struct Scene {
  std::string title;
  double interval_min = 0.5;
  double exposure_min = 0;
  double signal_to_noise = 20;  ///< of a grown nucleus in one frame
  double stated_share = 1;      ///< stated over true standard deviation
  double base_share = 0;        ///< what an emptied aperture still shows
  double dropped_share = 0;     ///< of frames that are missing
  double jitter_share = 0;      ///< of stamps, in intervals
  double bad_share = 0;         ///< of values that are wild
  double neighbour_share = 0;   ///< light of a neighbour's release that comes in later
  double bleaching_per_min = 0;
  double length_min = 150;
  int nuclei = 12;
  Release release;
  Growth growth;
};

struct TrueEntry {
  int nucleus = 0;
  double time_min = 0;
};

struct Film {
  FilmDescription description;
  Nuclei nuclei;
  ApertureTraces traces;
  std::vector<TrueEntry> all_entries;
  std::vector<TrueEntry> entries;  ///< those with enough frames before and after
};

Film simulate(const Scene& scene, std::uint64_t seed);

/// Spread of a uniform disc as a sum over its pixels of Gaussian clouds, tabulated: another road to
/// the same physics than the closed form. `tau_min` = a²/D.
Release disc_by_clouds(double tau_min);
/// A Gaussian cloud seen through a Gaussian aperture.
Release gaussian_spread(double time_min);
Release exponential_loss(double time_min);
/// Pores first, then diffusion: a leaky start.
Release pores_then_clouds(double pores_min, double tau_min);
Release linear_leak(double time_min);

}  // namespace wavefount::simulated
