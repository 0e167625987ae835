#pragma once

#include <vector>

#include "evidence.h"
#include "segments.h"
#include "wavefount/tracking/link_nuclei.h"

namespace wavefount::tracking {

/// What mitosis does to nuclei in this film, and how often nuclei come and go without one.
struct MitosisModel {
  double gap_min = 0;          ///< median from last to first sighting
  double gap_log_sd = 0;       ///< of its logarithm
  double displacement_um = 0;  ///< standard deviation an axis, flow removed
  double reach_um = 0;         ///< farther no nucleus re-forms
  double birth_density = 0;    ///< nuclei that first appear, 1/(µm² min)
  double false_density = 0;    ///< single false alarms, 1/(µm² min)
  double end_share = 0;        ///< of losses without a re-formation

  /// The longest gap over which a pair is still considered.
  double longest_min() const;
};

/// One segment's end that may go on as another's start.
struct Rebirth {
  int from = 0, to = 0;  ///< segments
  double gap_min = 0;
  double displacement_um = 0;  ///< from the predicted place
  double log_odds = 0;         ///< of being one nucleus against an end and an unrelated start
};

/// Before the film has spoken: 5 to 20 min out of sight, some µm to several tens away.
MitosisModel prior_model(const FilmDetections& film, const Evidence& evidence,
                         const LinkSettings& settings);

/// The film's own figures from pairs without a rival, drawn towards the prior while they are few.
MitosisModel fitted_model(const FilmDetections& film, const MitosisModel& prior,
                          const LinkSettings& settings, const std::vector<Rebirth>& unrivalled);

/// Log-odds of a gap and a displacement; `new_density`: of unrelated starts, 1/(µm² min).
double mitosis_odds(const MitosisModel& model, double gap_min, double displacement_um,
                    double new_density);
/// The same for a run of missed detections of a nucleus that stayed in interphase.
double missed_odds(const FilmDetections& film, const Motion& motion, const MitosisModel& model,
                   double gap_min, double displacement_um, double brightness_log_ratio,
                   double new_density);

}  // namespace wavefount::tracking
