#include "wavefount/tube/polygon_mask.h"

#include <algorithm>
#include <cmath>
#include <vector>

namespace wavefount::tube {

cv::Mat polygon_mask(const Polygon& polygon, cv::Size size) {
  cv::Mat mask = cv::Mat::zeros(size, CV_8U);
  std::vector<double> crossings;
  for (int y = 0; y < size.height; ++y) {
    crossings.clear();
    for (std::size_t i = 0, j = polygon.size() - 1; i < polygon.size(); j = i++) {
      const Point& a = polygon[i];
      const Point& b = polygon[j];
      if ((a.y > y) != (b.y > y)) crossings.push_back((b.x - a.x) * (y - a.y) / (b.y - a.y) + a.x);
    }
    std::sort(crossings.begin(), crossings.end());
    auto* row = mask.ptr<unsigned char>(y);
    for (std::size_t k = 0; k + 1 < crossings.size(); k += 2) {
      const int from = static_cast<int>(std::clamp(std::ceil(crossings[k]), 0.0, 1.0 * size.width));
      const int to =
          static_cast<int>(std::clamp(std::ceil(crossings[k + 1]), 0.0, 1.0 * size.width));
      for (int x = from; x < to; ++x) row[x] = 255;
    }
  }
  return mask;
}

}  // namespace wavefount::tube
