#pragma once

#include "wavefount/core/film.h"
#include "wavefount/core/interphase.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/prescan.h"
#include "wavefount/core/tube.h"

namespace wavefount {

/// Where in the exposure the film's time stamps lie.
enum class Stamp { start, middle, end };

struct EntrySettings {
  double longest_fall_min = 4;   ///< from near the top to clearly down; slower is fading
  double window_before_min = 0;  ///< 0: from the frame interval
  double window_after_min = 0;   ///< 0: from the frame interval
  int shape_falls = 80;          ///< most falls that the release's shape is learned from
  Stamp stamp = Stamp::start;
};

/// Interphases of all nuclei, by nucleus, then by time, with mitotic entries timed on the fixed
/// aperture. `traces` by position in nuclei, may be shorter or empty. `camera` may be null: no
/// nc_ratio_peak. `tube` may be null: spreading without walls.
Interphases time_entries(const FilmDescription& film, const Nuclei& nuclei,
                         const ApertureTraces& traces, const Tube* tube, const CameraModel* camera,
                         const EntrySettings& settings);

}  // namespace wavefount
