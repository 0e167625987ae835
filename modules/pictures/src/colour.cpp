#include "wavefount/pictures/colour.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace wavefount {
namespace {

constexpr int colours = 256;
constexpr int fine_steps = 4096;

double gamma_of(double linear) {
  linear = std::clamp(linear, 0.0, 1.0);
  return linear <= 0.0031308 ? 12.92 * linear : 1.055 * std::pow(linear, 1 / 2.4) - 0.055;
}

Lab between(const Lab& from, const Lab& to, double share) {
  return {from.lightness + share * (to.lightness - from.lightness),
          from.a + share * (to.a - from.a), from.b + share * (to.b - from.b)};
}

Lab along(const std::vector<Lab>& through, double share) {
  const double at = share * static_cast<double>(through.size() - 1);
  const auto segment = std::min(static_cast<std::size_t>(at), through.size() - 2);
  return between(through[segment], through[segment + 1], at - static_cast<double>(segment));
}

double distance(const Lab& from, const Lab& to) {
  return std::hypot(to.lightness - from.lightness, to.a - from.a, to.b - from.b);
}

}  // namespace

Lab lab_of(double lightness, double chroma, double hue_degrees) {
  const double hue = hue_degrees * std::numbers::pi / 180;
  return {lightness, chroma * std::cos(hue), chroma * std::sin(hue)};
}

Colour srgb_of(const Lab& lab) {
  const auto cubed = [](double value) { return value * value * value; };
  const double l = cubed(lab.lightness + 0.3963377774 * lab.a + 0.2158037573 * lab.b);
  const double m = cubed(lab.lightness - 0.1055613458 * lab.a - 0.0638541728 * lab.b);
  const double s = cubed(lab.lightness - 0.0894841775 * lab.a - 1.2914855480 * lab.b);
  return {gamma_of(4.0767416621 * l - 3.3077115913 * m + 0.2309699292 * s),
          gamma_of(-1.2684380046 * l + 2.6097574011 * m - 0.3413193965 * s),
          gamma_of(-0.0041960863 * l - 0.7034186147 * m + 1.7076147010 * s)};
}

ColourMap::ColourMap(const std::vector<Lab>& through) {
  std::vector<double> length = {0};
  for (int i = 1; i <= fine_steps; ++i)
    length.push_back(length.back() + distance(along(through, (i - 1.0) / fine_steps),
                                              along(through, double{1} * i / fine_steps)));
  std::size_t fine = 0;
  for (int i = 0; i < colours; ++i) {
    const double wanted = length.back() * i / (colours - 1);
    while (fine + 1 < length.size() && length[fine] < wanted) ++fine;
    colours_.push_back(srgb_of(along(through, static_cast<double>(fine) / fine_steps)));
  }
}

Colour ColourMap::operator()(double share) const {
  const double at = std::clamp(share, 0.0, 1.0) * (colours - 1);
  return colours_[static_cast<std::size_t>(std::lround(at))];
}

std::uint32_t ColourMap::pixel(double share) const {
  const auto colour = (*this)(share);
  const auto byte = [](double value) {
    return static_cast<std::uint32_t>(std::lround(255 * value));
  };
  return 0xFF000000U | byte(colour.red) << 16U | byte(colour.green) << 8U | byte(colour.blue);
}

const ColourMap& light_map() {
  static const ColourMap map({lab_of(0.13, 0.03, 262), lab_of(0.34, 0.075, 250),
                              lab_of(0.57, 0.085, 228), lab_of(0.79, 0.075, 205),
                              lab_of(0.97, 0.025, 180)});
  return map;
}

const ColourMap& time_map() {
  static const ColourMap map({lab_of(0.30, 0.14, 280), lab_of(0.47, 0.14, 325),
                              lab_of(0.63, 0.15, 15), lab_of(0.78, 0.13, 60),
                              lab_of(0.91, 0.11, 95)});
  return map;
}

}  // namespace wavefount
