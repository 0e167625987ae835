#pragma once

#include <cstdint>
#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/core/tube.h"
#include "wavefount/waves/arrivals.h"

namespace wavefount {

/// Where sources of waves may lie, in straightened places: the tube, and beyond its open edges.
struct SourceRegion {
  double left_um = 0, right_um = 0;
  double upper_um = 0, lower_um = 0;  ///< both 0 where the front is a point on a line
  double spacing_um = 0;
};

/// One arrival field drawn from the posterior: fronts that start from sources, the first one to
/// come is the arrival.
struct SourceDraw {
  std::vector<Point> places_um;
  std::vector<double> starts_min;
  std::vector<double> field_min;   ///< by arrival
  std::vector<double> depth_min;   ///< by arrival: slowness summed up along the tube to its place
  std::vector<int> source;         ///< by arrival: the one whose front came first
  double slowness_min_per_um = 0;  ///< mean along the stretch where nuclei are
  double jitter_min = 0;
};

struct SourceFit {
  std::vector<SourceDraw> draws;
  double jitter_min = 0;                                       ///< posterior median
  double slowness_min_per_um = 0, slowness_se_min_per_um = 0;  ///< mean and sd over the draws
  std::vector<char> astray;  ///< by arrival: more likely a stray than part of the field
};

struct SourceRules {
  int draws = 400;
  double period_min = 30;
  std::uint64_t seed = 0;
};

/// Arrival = earliest over sources k of T_k + ∫ slowness, with a slowness that varies smoothly
/// along the tube, plus jitter, plus measurement error; a share of strays lies anywhere within a
/// period. Number and places of sources, slowness, its variation and jitter are sampled together:
/// reversible-jump Markov chain (Green 1995) with parallel tempering (Geyer 1991). The jitter
/// is pooled over the waves: a first run of each wave by itself gives the common one, around
/// which each wave's own is log-normal in the second.
///
/// It takes the place of a Gaussian process over the neighbour graph: fronts have sharp minima and
/// ridges, which a smooth process has to buy with roughness everywhere; it missed the second and
/// third source in tubes of ten to fifteen nuclei.
std::vector<SourceFit> fit_sources(const std::vector<Arrivals>& waves, const SourceRegion& region,
                                   const SourceRules& rules);

/// The region for a tube: as far as the outline goes, and past open edges.
SourceRegion source_region(const Tube& tube, const std::vector<Arrivals>& waves, double spacing_um,
                           bool line);

}  // namespace wavefount
