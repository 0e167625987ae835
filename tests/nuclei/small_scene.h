#pragma once

#include <cstdint>
#include <vector>

#include "wavefount/core/image.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/prescan.h"
#include "wavefount/core/tube.h"
#include "wavefount/nuclei/find_nuclei.h"
#include "wavefount/nuclei/outline_nuclei.h"

namespace wavefount::nuclei {

/// A nucleus as it truly is, full-size pixels.
struct TrueNucleus {
  double x = 0, y = 0, radius = 10;
  double brightness = 100;  ///< counts above cytoplasm
  double aspect = 1;        ///< long over short axis, area kept
  double angle = 0;
  double texture = 0;  ///< relative amplitude
};

/// One frame with known truth: discs under a blur in a straight tube, with the camera's noise.
struct SmallScene {
  int width = 700, height = 300;
  double pixel_um = 0.65;
  int factor = 2;
  double wall_px = 40;  ///< of the upper and lower wall from the image's border; 0: no tube
  double end_px = 0;    ///< of the left and right end; 0: open
  double cytoplasm = 200, outside = 20, dark = 100;  ///< counts; the first two above `dark`
  double gain = 0.5, read_noise = 2;
  double psf_px = 1.6;
  double vignetting = 0;
  double glow = 0, glow_px = 5;  ///< of the walls
  int debris = 0;
  double mottle = 0;  ///< relative unevenness of the cytoplasm
  double most_counts = 65535;
  std::uint64_t seed = 1;
  std::vector<TrueNucleus> nuclei;

  ImagePointer frame() const;
  CameraModel camera() const;
  Tubes tubes() const;
  ReducedGrid grid() const;
  TubeMask mask() const;
  ImagePointer reduced(const Image& full) const;
  /// Nuclei at random places clear of one another and of the walls.
  void scatter(int count, double radius, double brightness, double radius_spread = 0.15,
               double brightness_spread = 0.15);
};

Detection detect(const SmallScene& scene, const Image& frame);
/// Detection and outlines.
std::vector<Sighting> measure(const SmallScene& scene, const Image& frame);

/// Sightings against truth: each nucleus has the nearest sighting within its radius.
struct Comparison {
  int found = 0, missed = 0, invented = 0;
  double radius_bias = 0, brightness_bias = 0;  ///< medians of relative errors
  double radius_scatter = 0, brightness_scatter = 0;
  double integrated_bias = 0;
  double place_error_px = 0;  ///< root mean square
  double jaccard = 0;  ///< mean of the outlines' overlap with the true ellipses, 0 for missed ones
  double pull = 0;     ///< robust spread of brightness errors in units of their standard deviation
};
Comparison compare(const SmallScene& scene, const std::vector<Sighting>& sightings);

}  // namespace wavefount::nuclei
