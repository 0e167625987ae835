#pragma once

#include <vector>

#include "wavefount/core/image.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/prescan.h"
#include "wavefount/nuclei/find_blobs.h"
#include "wavefount/nuclei/tube_mask.h"

namespace wavefount::nuclei {

struct DetectionSettings {
  double smallest_radius_um = 4;
  double largest_radius_um = 25;
  BlobThresholds thresholds;
};

struct Detection {
  std::vector<Sighting> candidates;  ///< strongest first; place, radius, sigma and tube are set
  double noise = 0;                  ///< of one reduced pixel of cytoplasm, counts
  cv::Mat1f glow;                    ///< of the walls, reduced grid, counts; empty: none
};

/// Candidate nuclei of one reduced frame. `reduced` has the size of the mask's grid; throws Problem
/// otherwise. Bright static debris may be among them; linking drops it.
Detection find_nuclei(const Image& reduced, const TubeMask& tubes, const CameraModel& camera,
                      double pixel_um, const DetectionSettings& settings);

}  // namespace wavefount::nuclei
