#pragma once

#include <opencv2/core/mat.hpp>

namespace wavefount::nuclei {

/// Distance of each pixel inside the tubes to the nearest wall, end or hole, pixels; the image's
/// border is none. Very large everywhere where there is no wall.
cv::Mat1f wall_distance(const cv::Mat1b& tubes);

/// Takes the glow of walls, ends and bubbles out of what stands above the cytoplasm: in stretches
/// of three times `reach_px` along each wall, the level at each distance from it up to `reach_px`,
/// interpolated along the wall. The level is a low quantile set right for the `noise` of a pixel,
/// so that nuclei at the wall, up to two thirds of a stretch, stay.
void remove_wall_glow(cv::Mat1f& excess, const cv::Mat1f& wall_distance, double reach_px,
                      double noise);

}  // namespace wavefount::nuclei
