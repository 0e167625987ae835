#pragma once

#include <opencv2/core/mat.hpp>

#include "wavefount/core/film.h"

namespace wavefount::tube {

/// 255 where a pixel's centre lies inside the polygon, 0 elsewhere (CV_8U).
cv::Mat polygon_mask(const Polygon& polygon, cv::Size size);

}  // namespace wavefount::tube
