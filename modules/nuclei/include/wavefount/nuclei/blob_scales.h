#pragma once

#include <vector>

namespace wavefount::nuclei {

/// One scale of the search for blobs.
struct BlobScale {
  double sigma_px = 0;        ///< of the whole smoothing, pixels of the searched image
  double radius_px = 0;       ///< of the disc that answers most, sigma · √2
  int step = 1;               ///< grid spacing, pixels of the searched image: 1, 2, 4 …
  std::vector<float> kernel;  ///< from the scale before to this one, taps `step` apart
  double noise_gain = 0;      ///< response to white noise of unit standard deviation
};

/// Scales half an octave apart that cover discs from the smallest to the largest radius, each
/// smoothed from the one before, on a grid that coarsens where the smoothing allows it.
///
/// The response is −σ² ∇²L (Lindeberg 1998, Int. J. Comput. Vis. 30:79): a disc of radius R and
/// height 1 answers 2/e at its centre at σ = R / √2, whatever R. `noise_gain` follows from the taps
/// as they are used, so that a response over it is in units of its own noise.
std::vector<BlobScale> plan_blob_scales(double smallest_radius_px, double largest_radius_px);

}  // namespace wavefount::nuclei
