#pragma once

#include <optional>

#include "wavefount/core/film.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/tube.h"

namespace wavefount {

/// What a pipeline may say about linking; what is empty is estimated from the film.
struct LinkSettings {
  bool divisions = false;   ///< one nucleus may re-form as two
  bool drop_debris = true;  ///< leave out what neither fills nor empties while others cycle
  std::optional<double> mitosis_min;     ///< expected time between loss and re-formation
  std::optional<double> reformation_um;  ///< how far from its predicted place one may re-form
};

/// What was found on the way, for messages and doubts.
struct LinkReport {
  int mitoses = 0;             ///< losses joined with a re-formation
  int ambiguous_mitoses = 0;   ///< of those, the ones where another pairing fits nearly as well
  int debris = 0;              ///< static things left out
  int spurious_sightings = 0;  ///< sightings left out as false alarms or diffusing clouds
  int unreported_jumps = 0;    ///< frames where all nuclei shifted together beyond the drift
  double motion_um = 0;        ///< standard deviation a frame and axis, flow removed
  double displacement_um = 0;  ///< through mitosis, standard deviation an axis
};

struct LinkedNuclei {
  Nuclei nuclei;
  LinkReport report;
};

/// Follows nuclei through the film by linear assignment in two passes (Jaqaman et al. 2008, Nat.
/// Methods 5:695): frame to frame, then segments over missed detections and over mitosis. Motion
/// is predicted from the neighbours; its scale, the time in mitosis and the displacement through
/// it are estimated from the film. Ids run from 1 by place along the tube. A `drift` shorter than
/// the film counts as no drift in the frames that it lacks.
LinkedNuclei link_nuclei(const FilmDescription& film, const Observations& observations,
                         const Tube& tube, const Drift& drift, const LinkSettings& settings = {});

}  // namespace wavefount
