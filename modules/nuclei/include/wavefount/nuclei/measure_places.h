#pragma once

#include "wavefount/core/film.h"
#include "wavefount/core/interphase.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/prescan.h"
#include "wavefount/core/reduced_film.h"
#include "wavefount/core/tube.h"

namespace wavefount::nuclei {

/// What the second touch of the film works on.
struct PlacesInput {
  const FilmDescription& film;
  const ReducedFilm& reduced;
  const CameraModel& camera;
  const Tube& tube;
  const Drift& drift;
  const Observations& observations;
  double before_min = 15;  ///< how long before a nucleus is first seen its place is measured
  double after_min = 30;   ///< and how long after it is last seen
};

/// Measures every nucleus' place with an aperture of its own fixed radius, the upper quartile of
/// its outlines' radii, in each usable frame from before it forms to after it empties and through
/// its mitoses. The place between sightings is interpolated, before the first and after the last
/// held (median of the nearest three), and carried along by the drift. Each reduced frame is read
/// once.
///
/// Completes `nuclei`: points between the first and the last sighting that were not found get the
/// brightness at their place. The traces are by position in `nuclei.nuclei`; a place that runs out
/// of the image or the tube has no value there.
ApertureTraces measure_places(const PlacesInput& input, Nuclei& nuclei);

}  // namespace wavefount::nuclei
