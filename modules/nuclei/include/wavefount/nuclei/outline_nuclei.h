#pragma once

#include <vector>

#include "wavefount/core/image.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/prescan.h"
#include "wavefount/nuclei/tube_mask.h"

namespace wavefount::nuclei {

/// What an outline must be like to stay.
struct OutlineLimits {
  double smallest_radius_px = 2;  ///< a smaller outline is no nucleus
  double largest_radius_px = 60;  ///< neither is a larger one
  double significance = 5;        ///< lowest brightness in units of its standard deviation
  double slenderest = 4;          ///< greatest ratio of the outline's axes
  double cloud_radius_px = 15;    ///< from this radius on a soft edge means a spreading cloud
};

/// One frame at full size, as the outlines are measured on it.
struct FullFrame {
  const Image& sharpest;  ///< for outlines
  const Image& pixels;    ///< for brightness; same size
  const TubeMask& tubes;
  const CameraModel& camera;
};

/// Outlines and measures the candidates of one frame.
///
/// Outline: half-maximum contour against the local cytoplasm, on the image smoothed as much as the
/// candidate's noise asks for; candidates whose nuclei touch are parted by a watershed, those of
/// one nucleus joined. Radius, area and brightness are those of the uniform disc that looks as
/// blurred as the outline's edge tells (partial volume), so that a small nucleus is not dimmed by
/// the optics. Brightness is the mean over the outline above a clipped mean of the ring around it,
/// with other nuclei, walls and outside left out.
///
/// Dropped: what the limits exclude, and a wide soft cloud such as a nucleus' content leaves that
/// was just released. Returned from top to bottom, left to right.
std::vector<Sighting> outline_nuclei(const FullFrame& frame,
                                     const std::vector<Sighting>& candidates,
                                     const OutlineLimits& limits);

}  // namespace wavefount::nuclei
