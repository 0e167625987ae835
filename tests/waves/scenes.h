#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "wavefount/core/interphase.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/tube.h"

namespace wavefount::testing {

enum class Kind { single, two, three, entering, synchronous, incoherent };

/// What a scene of entry tables is made from; times in minutes, lengths in µm.
struct SceneOptions {
  Kind kind = Kind::single;
  double length_um = 2000, width_um = 100;
  double spacing_um = 160;
  double period_min = 35, period_growth = 0.05;
  int cycles = 5;
  double speed_um_per_min = 25, speed_variation = 0;
  double jitter_min = 0.5, timing_error_min = 0.1;
  double missing_share = 0, extra_share = 0;
  double moving_um = 0;  ///< how far sources move from cycle to cycle
  bool at_wall = false, at_end = false;
  std::uint64_t seed = 1;
};

struct TrueWave {
  std::vector<Point> sources_um;   ///< in view, each with a basin of two nuclei or more
  std::vector<int> interphases;    ///< positions of its entries
  double slowness_min_per_um = 0;  ///< mean over the places that its fronts pass
};

struct Scene {
  Tube tube;
  Nuclei nuclei;
  Interphases interphases;
  std::vector<double> times_min;
  std::vector<TrueWave> waves;
  double spacing_um = 0;
};

Tube straight_tube(double length_um, double width_um);

/// Entry tables of a straight tube: nuclei about evenly spaced, each cycle's arrival the earliest
/// of fronts that run from its sources at a speed that may vary along the tube; jitter, timing
/// error, missing and extra entries. All from the seed.
Scene make_scene(const SceneOptions& options);

}  // namespace wavefount::testing
