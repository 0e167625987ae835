#pragma once

#include <optional>
#include <vector>

#include "wavefount/kinetics/dispersion.h"

namespace wavefount {

/// Brightness of one nucleus at one time.
struct FillingPoint {
  double time_min = 0;
  double brightness = 0;  ///< counts above cytoplasm
  double variance = 0;    ///< counts²; relative weights matter, the level is estimated
};

/// plateau · (1 − exp(−rate (t − formed))), or a straight line from `formed` where that explains
/// the points as well (AICc; Hurvich & Tsai 1989).
struct FillingFit {
  bool curved = false;
  double formed_min = 0;
  double rate_per_min = 0;  ///< of the curve; 0 for a line
  double plateau = 0;       ///< of the curve, counts; 0 for a line
  double initial = 0;       ///< plateau · rate, or the line's slope, counts/min
  double rate_variance = 0, initial_variance = 0;  ///< under the stated variances
  double start_min = 0;                            ///< first point used
  double level_at_start = 0;                       ///< fitted there, counts
  double sum_of_squares = 0;                       ///< weighted
  int freedom = 0;
  FitResiduals residuals;  ///< of the points used
};

/// Weighted least squares; points that lie more than 4.5 robust standard deviations off are left
/// out, at most a fifth of them. Empty with fewer than five points or when brightness does not
/// rise. `points` by time; not finite ones and variances not above zero are skipped.
std::optional<FillingFit> fit_filling(const std::vector<FillingPoint>& points);

}  // namespace wavefount
