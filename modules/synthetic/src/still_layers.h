#pragma once

#include <opencv2/core/mat.hpp>

#include "wavefount/synthetic/scene.h"

namespace wavefount {

/// What does not change while the film runs, on a canvas that is larger than the frame by a margin,
/// so that a drifting frame can be cut out of it.
struct StillLayers {
  explicit StillLayers(const Scene& scene);

  int margin_px = 0;
  cv::Mat content;   ///< counts: surround, cytoplasm, glow, debris, bubbles (CV_32F, canvas)
  cv::Mat inside;    ///< 0 to 1: share of a pixel that shows the tube's inside (CV_32F, canvas)
  cv::Mat tube_of;   ///< index of the nearest tube (CV_8U, canvas)
  cv::Mat evenness;  ///< CV_32F, frame
};

}  // namespace wavefount
