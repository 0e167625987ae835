#pragma once

#include <array>
#include <opencv2/core/mat.hpp>
#include <vector>

#include "wavefount/core/image.h"

namespace wavefount::tube {

/// Where the content of an image lies against a reference, reduced pixels: content at (x, y) of the
/// reference is at (x + shift.x, y + shift.y) of the image.
struct Shift {
  double x = 0;
  double y = 0;
  double se = 0;  ///< standard error of the better determined direction
  /// 0 to 1: share of the reference's edges that the image confirms, in the direction in which it
  /// confirms less.
  double agreement = 0;
  /// Directions in which nothing tells and the prior stands: none, one (a unit vector), or both.
  int blind_directions = 0;
  double blind_x = 0;
  double blind_y = 0;
  double gain = 1;  ///< image = gain · reference + offset
  double offset = 0;
};

/// An image made ready to be compared: smoothed, and on demand its thumbnail's spectrum. Not for
/// several threads at once before `spectrum()` was called.
class MovingImage {
 public:
  explicit MovingImage(const Image& reduced);
  const cv::Mat& smoothed() const { return smoothed_; }
  /// Noise of a smoothed pixel, counts.
  double noise() const { return noise_; }
  /// Spectrum of the windowed, high-passed thumbnail (CV_32FC2), computed once.
  const cv::Mat& spectrum() const;
  /// Reduced pixels a side of a thumbnail pixel.
  double thumb_factor() const { return thumb_factor_; }

 private:
  cv::Mat smoothed_;
  double noise_ = 0;
  double thumb_factor_ = 1;
  mutable cv::Mat spectrum_;
};

/// What images are compared with. Coarse: phase correlation of thumbnails (Kuglin & Hines 1975),
/// its few highest peaks as candidates. Fine: least squares on brightness at the reference's
/// strongest edges (Lucas & Kanade 1981, inverse compositional, Baker & Matthews 2004) with Tukey's
/// biweight, so that nuclei which form or vanish drop out, and with half of the edges chosen for
/// the direction that the walls leave undetermined. Where no standing edge tells of a direction the
/// prior is kept in that direction. Safe for many threads once made.
class ShiftReference {
 public:
  /// `spread`: how much each pixel varies in time beside shifts, counts, or null: edges that vary
  /// weigh little. `least_agreement`: a direction whose edges are confirmed by less is blind.
  explicit ShiftReference(const Image& reduced, const Image* spread = nullptr,
                          double least_agreement = 0.35);

  /// `wide_search`: try the peaks of the phase correlation too, not only the prior.
  Shift find(const MovingImage& moving, double prior_x, double prior_y, bool wide_search) const;

 private:
  /// One edge pixel of the reference: `variance` is of its brightness beside noise of the other.
  struct Anchor {
    float x, y, value, gradient_x, gradient_y, variance;
  };
  struct Fit;

  std::vector<Anchor> edges(const cv::Mat* spread) const;
  void choose_anchors(std::vector<Anchor> candidates);
  void sample(const MovingImage& moving, Fit& fit) const;
  bool improve(Fit& fit) const;
  Shift refine(const MovingImage& moving, double x, double y, double prior_x, double prior_y) const;
  Shift judge(const Fit& fit, double prior_x, double prior_y) const;
  std::vector<cv::Point2d> peaks(const MovingImage& moving) const;

  MovingImage image_;
  double least_agreement_;
  std::vector<Anchor> anchors_;
  std::array<double, 4> directions_{1, 0, 0, 1};  ///< weaker, then stronger unit vector
};

/// The image without nuclei: binned to at most 256 pixels a side and opened (Serra 1982) with a
/// disc of `blob_px` reduced pixels, so that walls, ends and bubbles stay and all that is small and
/// bright goes. Made for the coarse shift that nuclei must not speak in.
struct OpenedThumb {
  ImagePointer image;
  int factor = 1;  ///< reduced pixels a side of a thumbnail pixel
};
OpenedThumb opened_thumb(const Image& reduced, double blob_px);

}  // namespace wavefount::tube
