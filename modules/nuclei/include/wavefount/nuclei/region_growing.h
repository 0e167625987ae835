#pragma once

#include <opencv2/core/mat.hpp>
#include <vector>

namespace wavefount::nuclei {

/// A nucleus to be outlined in a window: where it is thought to be and how bright it must be.
struct Seed {
  double x = 0, y = 0;  ///< pixels of the window
  double radius = 0;    ///< pixels
  double half = 0;      ///< half-maximum level, counts
  double peak = 0;      ///< level over cytoplasm, counts
};

/// Pixels of each seed's nucleus: index of the seed, -1 for none. A pixel belongs to a seed when it
/// is at least as bright as the seed's half level, connected to it and within reach (twice its
/// radius). Seeds that touch are parted by a watershed (Meyer 1994, Signal Processing 38:113) on
/// brightness and depth below the common outline together: nuclei part at a dark line, and where
/// there is none at the neck. Holes are filled.
cv::Mat1i grow_regions(const cv::Mat1f& image, const std::vector<Seed>& seeds);

/// The smallest box around the pixels of each label from 0 to count - 1; empty for an absent one.
std::vector<cv::Rect> boxes_of(const cv::Mat1i& labels, std::size_t count);

}  // namespace wavefount::nuclei
