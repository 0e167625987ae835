#pragma once

#include <opencv2/core/mat.hpp>
#include <vector>

#include "wavefount/core/prescan.h"

namespace wavefount::nuclei {

/// A disc in a reduced frame, reduced pixels.
struct Disc {
  double x = 0, y = 0, radius = 0;
};

struct ApertureReading {
  bool valid = false;       ///< false: too little of the disc or of its surroundings is in the tube
  double signal = 0;        ///< mean over the disc above the surroundings, counts
  double variance = 0;      ///< of `signal` under the camera's noise, counts²
  double surroundings = 0;  ///< counts, dark offset included
};

/// Where the surroundings of a disc are measured, reduced pixels.
struct Ring {
  double inner_px = 0, outer_px = 0;
};
Ring ring_around(double radius_px);

/// Reads a fixed disc, its rim pixels by the share that it covers, against the clipped mean of a
/// ring farther out (1.5 to 2.5 radii). Pixels nearer to one of `others` for its size are left out
/// of the disc, those within 1.3 of their radii out of the ring, those outside of the tube (0 in
/// `tubes`) out of both. `binned_pixels`: camera pixels in a reduced one.
ApertureReading read_aperture(const cv::Mat1f& frame, const cv::Mat1b& tubes, const Disc& disc,
                              const std::vector<Disc>& others, const CameraModel& camera,
                              int binned_pixels);

}  // namespace wavefount::nuclei
