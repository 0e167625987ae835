#pragma once

#include <string>
#include <vector>

#include "wavefount/core/interphase.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/prescan.h"
#include "wavefount/kinetics/bleaching.h"
#include "wavefount/kinetics/blur.h"

namespace wavefount {

/// What the import fits of one film rest on.
struct ImportSettings {
  Bleaching bleaching;
  Blur blur;
  double exposure_min = 0;
  double before_entry_min = 0;  ///< points this close before the entry are left out
};

/// Completes `interphases` with import fits and formation times, for those whose start was seen:
/// brightness inside the outline, of found and not doubtful points up to the entry, corrected for
/// blur and bleaching. Standard errors carry the film's pooled dispersion and the serial
/// correlation of residuals. relative_per_min needs the camera's dark offset as given.
void fit_imports(Interphases& interphases, const Nuclei& nuclei, const CameraModel& camera,
                 const ImportSettings& settings);

}  // namespace wavefount
