#include "wavefount/core/image.h"

namespace wavefount {

ImagePointer make_image(int width, int height) {
  auto image = Image::New();
  image->SetRegions(Image::SizeType{static_cast<itk::SizeValueType>(width),
                                    static_cast<itk::SizeValueType>(height)});
  image->Allocate(false);
  return image;
}

int image_width(const Image& image) {
  return static_cast<int>(image.GetBufferedRegion().GetSize()[0]);
}

int image_height(const Image& image) {
  return static_cast<int>(image.GetBufferedRegion().GetSize()[1]);
}

cv::Mat as_matrix(Image& image) {
  return {image_height(image), image_width(image), CV_32FC1, image.GetBufferPointer()};
}

cv::Mat as_matrix(const Image& image) {
  return {image_height(image), image_width(image), CV_32FC1,
          const_cast<float*>(image.GetBufferPointer())};
}

}  // namespace wavefount
