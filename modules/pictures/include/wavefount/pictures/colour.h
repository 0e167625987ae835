#pragma once

#include <cstdint>
#include <vector>

namespace wavefount {

/// sRGB, 0 to 1.
struct Colour {
  double red = 0, green = 0, blue = 0;
};

/// A colour in OKLab (Ottosson 2020, "A perceptual color space for image processing"): lightness 0
/// to 1, and two opponent axes, so that equal distances look about equally different.
struct Lab {
  double lightness = 0, a = 0, b = 0;
};

/// From lightness, chroma and hue in degrees.
Lab lab_of(double lightness, double chroma, double hue_degrees);
/// Clipped to what a screen shows.
Colour srgb_of(const Lab& lab);

/// A scale of colours from 0 to 1 whose steps are equally different in OKLab. Lightness rises all
/// the way, so that it reads in greyscale and by people who confuse hues.
class ColourMap {
 public:
  /// Through the given colours; lightness must rise.
  explicit ColourMap(const std::vector<Lab>& through);
  /// `share` outside 0 to 1 takes the nearest end.
  Colour operator()(double share) const;
  /// As a pixel 0xffrrggbb.
  std::uint32_t pixel(double share) const;

 private:
  std::vector<Colour> colours_;
};

/// For light: near black over deep sea blue to pale. Warm marks stand out on it.
const ColourMap& light_map();
/// For times: dark indigo (early) over rose to straw (late).
const ColourMap& time_map();

}  // namespace wavefount
