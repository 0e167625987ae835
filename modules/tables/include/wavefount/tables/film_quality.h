#pragma once

#include <optional>

#include "wavefount/core/film.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/prescan.h"
#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"

namespace wavefount {

/// Light lost over the film, per cent of that at its start: Theil–Sen slope (Sen 1968) of the
/// logarithm of the tube's offset-corrected light. Empty where light can enter or leave the view
/// (an open end, no tube outline), without camera or with fewer than three usable frames.
std::optional<double> bleaching_percent(const Observations& observations, const Tube& tube,
                                        const CameraModel* camera);

/// Median over the nuclei's undoubtful points of brightness over the camera's noise of one pixel of
/// their cytoplasm. Empty without nuclei or camera.
std::optional<double> signal_to_noise(const Nuclei& nuclei, const CameraModel* camera);

/// Largest distance of a frame's content from where it was in the first frame, µm. Empty without
/// drift.
std::optional<double> largest_drift_um(const Drift& drift, double pixel_um);

/// Time up to which the extract cycles: what the sidecar says, else the start of the first terminal
/// wave, else the last frame. Empty for a film without frames.
std::optional<double> last_healthy_min(const FilmDescription& film, const Waves& waves);

}  // namespace wavefount
