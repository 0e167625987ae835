#pragma once

#include <vector>

#include "segments.h"

namespace wavefount::tracking {

/// How far each segment is believed to be a nucleus at all.
struct Evidence {
  std::vector<bool> weak;  ///< by segment: may be false alarms, or light spreading after a release
  double false_density = 0;   ///< single false alarms, 1/(µm² min)
  double interphase_min = 0;  ///< half of all sightings belong to segments that last longer
};

Evidence weigh_segments(const FilmDetections& film, const Motion& motion,
                        const std::vector<Segment>& segments);

/// A weak segment that still counts although it was joined with nothing: the film starts or ends
/// with it, and it is as clear as other nuclei.
bool stands_alone(const FilmDetections& film, const Evidence& evidence,
                  const std::vector<Segment>& segments, int segment);

}  // namespace wavefount::tracking
