#pragma once

#include <opencv2/core/mat.hpp>
#include <vector>

#include "wavefount/nuclei/blob_scales.h"
#include "wavefount/nuclei/cytoplasm.h"

namespace wavefount::nuclei {

/// A bright blob in a reduced frame.
struct Blob {
  double x = 0, y = 0;   ///< reduced pixels, subpixel
  double radius = 0;     ///< of the disc that answers most at the blob's scale, reduced pixels
  double response = 0;   ///< −σ² ∇²L there, counts
  double sigma = 0;      ///< response in units of its own noise
  double roundness = 0;  ///< smaller over larger curvature, 1 round, 0 a line or an edge
  int scale = 0;         ///< index into the scales
};

struct BlobThresholds {
  double sigma = 5.5;      ///< lowest response in units of its noise
  double roundness = 0.2;  ///< lowest ratio of the Hessian's eigenvalues
};

/// What blobs are looked for in; all of one size.
struct BlobField {
  const cv::Mat1f& excess;         ///< above the cytoplasm, counts, 0 outside of the tubes
  const cv::Mat1b& tubes;          ///< 0 outside
  const cv::Mat1f& wall_distance;  ///< pixels
  const Cytoplasm& cytoplasm;      ///< for the noise
};

/// Local maxima over place and scale of the scale-normalised Laplacian (Lindeberg 1998), strongest
/// first, none inside another and none wider than its place in the tube has room for.
///
/// The noise of each scale is the camera's, carried through the filter, times the ratio by which
/// the response between the candidates spreads wider (texture of the cytoplasm, a camera model that
/// is off): one threshold is one false-alarm rate at any exposure and in any extract.
std::vector<Blob> find_blobs(const BlobField& field, const std::vector<BlobScale>& scales,
                             const BlobThresholds& thresholds);

}  // namespace wavefount::nuclei
