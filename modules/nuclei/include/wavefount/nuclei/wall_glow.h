#pragma once

#include <opencv2/core/mat.hpp>

#include "wavefount/core/image.h"
#include "wavefount/nuclei/tube_mask.h"

namespace wavefount::nuclei {

/// Distance of each pixel inside the tubes to the nearest wall, end or hole, pixels; the image's
/// border is none. Very large everywhere where there is no wall.
cv::Mat1f wall_distance(const cv::Mat1b& tubes);

/// The glow of walls, ends and bubbles inside the tubes, counts, from what stands above the
/// cytoplasm: in stretches of three times `reach_px` along each wall, the level at each distance
/// from it up to `reach_px`, interpolated along the wall. The level is a low quantile set right for
/// the `noise` of a pixel, so that nuclei at the wall, up to two thirds of a stretch, stay. Empty
/// where nothing glows.
cv::Mat1f wall_glow(const cv::Mat1f& excess, const cv::Mat1f& wall_distance, double reach_px,
                    double noise);

/// A full-size frame less the glow, which is given on the reduced grid; a copy where it is empty.
ImagePointer without_glow(const Image& full, const ReducedGrid& grid, const cv::Mat1f& glow);

/// The glow of one frame on its way from detection to outlines.
struct GlowOfFrame {
  static constexpr const char* record_name = "wall-glow";
  cv::Mat1f glow;
};

}  // namespace wavefount::nuclei
