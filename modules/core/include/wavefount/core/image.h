#pragma once

#include <itkImage.h>

#include <opencv2/core/mat.hpp>

namespace wavefount {

/// Pixels of one plane in camera counts, row-major. The index is (x, y) from the top-left pixel;
/// spacing and origin are left at 1 and 0: lengths in µm come from FilmDescription::pixel_um.
using Image = itk::Image<float, 2>;
using ImagePointer = Image::Pointer;

/// A new image of the given size, pixels not initialised.
ImagePointer make_image(int width, int height);

int image_width(const Image& image);
int image_height(const Image& image);

/// The image's own memory seen as an OpenCV matrix (CV_32FC1): no copy, valid while the image
/// lives.
cv::Mat as_matrix(Image& image);
/// Read-only view; OpenCV has no const matrix, so do not write through it.
cv::Mat as_matrix(const Image& image);

}  // namespace wavefount
