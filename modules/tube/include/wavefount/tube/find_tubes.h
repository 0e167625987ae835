#pragma once

#include <opencv2/core/mat.hpp>
#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/core/messages.h"
#include "wavefount/core/prescan.h"
#include "wavefount/core/tube.h"

namespace wavefount::tube {

struct TubeSettings {
  bool automatic = true;           ///< false: the whole field stands for the tube
  double wall_glow_um = 12;        ///< bright lines up to this width are wall glow
  double narrowest_um = 40;        ///< tubes and embryos are at least this wide
  double smallest_bubble_um = 20;  ///< diameter
};

/// The tubes of a film from its prescan: outlines, axes, widths, ends and walls, bubbles and what
/// the sidecar excludes as holes; what the sidecar says about them wins. Never empty: without an
/// outline the whole field stands for the tube. Says in `messages` what was found.
Tubes find_tubes(const FilmDescription& film, const Prescan& prescan, const TubeSettings& settings,
                 Messages& messages);

/// Dark regions inside an outline, polygons in reduced pixels. `image` in counts, `inside` and
/// `outside` the levels at each pixel (CV_32FC1). `smallest_px`: diameter.
std::vector<Polygon> find_bubbles(const cv::Mat& image, const cv::Mat& inside,
                                  const cv::Mat& outside, const Polygon& outline,
                                  double smallest_px);

}  // namespace wavefount::tube
