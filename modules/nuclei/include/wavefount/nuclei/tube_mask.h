#pragma once

#include <opencv2/core/mat.hpp>

#include "wavefount/core/tube.h"

namespace wavefount::nuclei {

/// How a reduced, cropped frame lies on the full-size frame: reduced pixel (i, j) is the mean of
/// the square of `factor` full-size pixels a side that starts at (left + i · factor, top + j ·
/// factor).
struct ReducedGrid {
  int left = 0, top = 0;  ///< full-size pixels
  int factor = 1;
  int width = 0, height = 0;  ///< reduced pixels

  double column(double x_px) const { return (x_px - left - (factor - 1) / 2.0) / factor; }
  double row(double y_px) const { return (y_px - top - (factor - 1) / 2.0) / factor; }
  double x_px(double column) const { return left + column * factor + (factor - 1) / 2.0; }
  double y_px(double row) const { return top + row * factor + (factor - 1) / 2.0; }
};

/// Which tube each reduced pixel belongs to.
class TubeMask {
 public:
  static constexpr const char* record_name = "tube-mask";

  TubeMask() = default;
  /// `shift_x_px`, `shift_y_px`: of the frame's content against the first frame, full-size pixels.
  /// An unmeasured tube, or none at all, stands for the whole field. Pixels that an outline or a
  /// hole cuts belong to no tube.
  TubeMask(const Tubes& tubes, const ReducedGrid& grid, double pixel_um, double shift_x_px,
           double shift_y_px);

  const ReducedGrid& grid() const { return grid_; }
  /// CV_8UC1, 0 outside, else the tube's index + 1.
  const cv::Mat1b& pixels() const { return pixels_; }
  /// Index of the tube at a full-size pixel, -1 outside of all or of the grid.
  int tube_at(int x_px, int y_px) const {
    const int x = x_px - grid_.left;
    const int y = y_px - grid_.top;
    if (x < 0 || y < 0) return -1;
    const int column = x / grid_.factor;
    const int row = y / grid_.factor;
    return column < grid_.width && row < grid_.height ? pixels_(row, column) - 1 : -1;
  }

 private:
  ReducedGrid grid_;
  cv::Mat1b pixels_;
};

}  // namespace wavefount::nuclei
