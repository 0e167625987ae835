#pragma once

#include <optional>
#include <vector>

#include "wavefount/tube/axis.h"

namespace wavefount::tube {

/// A wall, an end or a closed outline along a row of profiles that lead from inside to outside.
struct Border {
  std::vector<double> position;  ///< smoothed, pixels along the profile; one a profile
  std::vector<double> weight;    ///< 0 where not found or dropped as debris, bubble …
  double found_share = 0;        ///< profiles whose edge was seen, of those asked for
  double out_of_view_share = 0;  ///< profiles that leave the image before any edge
  double contrast = 0;           ///< inside less outside, median, counts
  double roughness = 0;          ///< robust deviation of single profiles from the curve, pixels
};

/// What to look for. All in pixels along the profiles.
struct BorderSearch {
  /// Rough position, one a profile; NaN where none is asked for, infinity where the profile leaves
  /// the image before any edge.
  std::vector<double> expected;
  double reach = 10;                 ///< how far around it
  double inside_depth = 20;          ///< the inside level is taken from this far in
  double outside_depth = 15;         ///< and the outside level from this far out
  double outside_level = 0;          ///< where no outside is in view
  double blur = 4;                   ///< next to the edge neither level holds
  std::optional<double> half_width;  ///< of the tube, where the profiles start at its axis
  bool by_section = true;            ///< false: half height only, for a first guess
  double cutoff = 100;  ///< waves shorter than this are no shape of the border, profiles
};

/// Half-height positions between local inside and outside level, then a robust smooth curve, moved
/// by what the mean profile across it tells of glow and a round section (section.h).
/// `profiles`: one row a profile, values rising outwards with the column.
Border find_border(const Straightened& profiles, const BorderSearch& search);

}  // namespace wavefount::tube
