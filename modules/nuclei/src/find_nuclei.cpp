#include "wavefount/nuclei/find_nuclei.h"

#include <algorithm>
#include <cmath>
#include <opencv2/core.hpp>

#include "wavefount/core/problem.h"
#include "wavefount/nuclei/cytoplasm.h"
#include "wavefount/nuclei/wall_glow.h"

namespace wavefount::nuclei {
namespace {

/// Side of the blocks that the cytoplasm's level is taken from, in radii of the largest nucleus:
/// one of them fills a fifth of a block.
constexpr double block_radii = 4;

Sighting candidate_of(const Blob& blob, const TubeMask& tubes) {
  const ReducedGrid& grid = tubes.grid();
  Sighting sighting;
  sighting.x_px = grid.x_px(blob.x);
  sighting.y_px = grid.y_px(blob.y);
  sighting.radius_px = blob.radius * grid.factor;
  sighting.detection_sigma = blob.sigma;
  sighting.tube = std::max(0, tubes.tube_at(static_cast<int>(std::lround(sighting.x_px)),
                                            static_cast<int>(std::lround(sighting.y_px))));
  return sighting;
}

}  // namespace

Detection find_nuclei(const Image& reduced, const TubeMask& tubes, const CameraModel& camera,
                      double pixel_um, const DetectionSettings& settings) {
  const ReducedGrid& grid = tubes.grid();
  if (image_width(reduced) != grid.width || image_height(reduced) != grid.height)
    throw Problem("A reduced frame does not have the size that the reduction planned.");
  const double reduced_um = pixel_um * grid.factor;
  const cv::Mat1f frame(as_matrix(reduced));
  const Cytoplasm cytoplasm(frame, tubes.pixels(), camera, grid.factor,
                            block_radii * settings.largest_radius_um / reduced_um);
  const auto scales = plan_blob_scales(settings.smallest_radius_um / reduced_um,
                                       settings.largest_radius_um / reduced_um);
  Detection detection;
  detection.noise = cytoplasm.typical_noise();
  cv::Mat1f excess = cytoplasm.excess(frame, tubes.pixels());
  const cv::Mat1f walls = wall_distance(tubes.pixels());
  detection.glow =
      wall_glow(excess, walls, settings.largest_radius_um / reduced_um, cytoplasm.typical_noise());
  if (!detection.glow.empty()) cv::subtract(excess, detection.glow, excess);
  for (const Blob& blob :
       find_blobs({excess, tubes.pixels(), walls, cytoplasm}, scales, settings.thresholds))
    detection.candidates.push_back(candidate_of(blob, tubes));
  return detection;
}

}  // namespace wavefount::nuclei
