#include "released_light.h"

#include <algorithm>
#include <cmath>

namespace wavefount {
namespace {

constexpr int cell_px = 8;  // far light changes over 25 µm and more

double normal_shape(double off, double sigma) {
  const double z = off / sigma;
  return std::exp(-z * z / 2);
}

/// A function tabulated over an interval, read off linearly.
class Profile {
 public:
  template <typename Function>
  Profile(double from, double to, Function function) : from_(from) {
    values_.resize(97);
    const double step = (to - from) / static_cast<double>(values_.size() - 1);
    inverse_step_ = 1 / step;
    for (std::size_t i = 0; i < values_.size(); ++i)
      values_[i] = function(from + step * static_cast<double>(i));
  }
  double at(double place) const {
    const double position =
        std::clamp((place - from_) * inverse_step_, 0.0, static_cast<double>(values_.size() - 2));
    const auto knot = static_cast<std::size_t>(position);
    return values_[knot] +
           (position - static_cast<double>(knot)) * (values_[knot + 1] - values_[knot]);
  }

 private:
  double from_;
  double inverse_step_ = 0;
  std::vector<double> values_;
};

double across_images(const Tube& tube, double centre, double sigma, double across) {
  const int reach = 1 + static_cast<int>(std::ceil(4 * sigma / tube.width_um));
  double sum = 0;
  for (int n = -reach; n <= reach; ++n)
    sum += normal_shape(across - n * tube.width_um - (n % 2 == 0 ? centre : -centre), sigma);
  return sum;
}

double along_images(const Tube& tube, double centre, double sigma, double along) {
  double sum = normal_shape(along - centre, sigma);
  if (tube.left_end == Boundary::closed) sum += normal_shape(along + centre, sigma);
  if (tube.right_end == Boundary::closed)
    sum += normal_shape(along - 2 * tube.length_um + centre, sigma);
  return sum;
}

}  // namespace

std::vector<Portion> released_portions(const SceneLife& life, const SceneOptics& optics,
                                       double time_min) {
  constexpr int count = 6;
  std::vector<Portion> portions;
  const double elapsed = time_min - life.entry_min;
  if (life.dies || elapsed <= 0) return portions;
  const double free = -std::expm1(-elapsed / life.permeabilise_min);
  for (int i = 0; i < count; ++i) {
    const double moment = -life.permeabilise_min * std::log1p(-free * (i + 0.5) / count);
    const double variance = 2 * optics.diffusion_um2_per_min * (elapsed - moment);
    double light = life.brightness(life.entry_min) * free / count;
    if (optics.optics == Optics::sectioned)
      light /= std::sqrt(1 + variance / (optics.section_um * optics.section_um));
    portions.push_back({std::sqrt(optics.psf_um * optics.psf_um + variance), light});
  }
  return portions;
}

FarLight::Cells::Cells(const Scene& scene, const StillLayers& still)
    : columns((still.content.cols + cell_px - 1) / cell_px),
      rows((still.content.rows + cell_px - 1) / cell_px) {
  for (int row = 0; row < rows; ++row)
    for (int column = 0; column < columns; ++column) {
      const double x = column * cell_px + (cell_px - 1) / 2.0;
      const double y = row * cell_px + (cell_px - 1) / 2.0;
      const int index =
          still.tube_of.at<std::uint8_t>(std::min(static_cast<int>(y), still.content.rows - 1),
                                         std::min(static_cast<int>(x), still.content.cols - 1));
      tube.push_back(scene.tubes.empty() ? -1 : index);
      if (scene.tubes.empty()) continue;
      const Point place{(x - still.margin_px) * scene.pixel_um,
                        (y - still.margin_px) * scene.pixel_um};
      const auto at = scene.tubes[static_cast<std::size_t>(index)].place(place);
      along_um.push_back(static_cast<float>(at.along_um));
      across_um.push_back(static_cast<float>(at.across_um));
    }
}

FarLight::FarLight(const Cells& cells)
    : cells_(&cells), grid_(cells.rows, cells.columns, CV_32F, cv::Scalar(0)) {}

void FarLight::add(const Tube& tube, int tube_index, TubePlace centre, double sigma_um,
                   double total_light) {
  constexpr double too_dim = 0.02;  // counts: far below any camera's noise
  constexpr double reach = 4;       // standard deviations
  const double peak = total_light / (2 * M_PI * sigma_um * sigma_um);
  if (peak < too_dim) return;
  const double half = tube.width_um / 2;
  const Profile across(-half - 20, half + 20, [&](double place) {
    return across_images(tube, centre.across_um, sigma_um, place);
  });
  const double from = centre.along_um - reach * sigma_um;
  const double to = centre.along_um + reach * sigma_um;
  const Profile along(from, to, [&](double place) {
    return peak * along_images(tube, centre.along_um, sigma_um, place);
  });
  float* cells = grid_.ptr<float>();
  for (std::size_t i = 0; i < cells_->tube.size(); ++i) {
    const double place = cells_->along_um[i];
    if (cells_->tube[i] != tube_index || place < from || place > to) continue;
    cells[i] += static_cast<float>(along.at(place) * across.at(cells_->across_um[i]));
  }
  empty_ = false;
}

void FarLight::row(double x, double y, std::size_t count, std::vector<float>& values) const {
  values.resize(count);
  constexpr double middle = (cell_px - 1) / 2.0;
  const auto knot = [](double place, int knots) {
    return std::clamp(place, 0.0, std::max(0.0, knots - 1.0001));
  };
  const double v = knot((y - middle) / cell_px, grid_.rows);
  const auto top = static_cast<int>(v);
  const auto below = static_cast<float>(v - top);
  const float* upper = grid_.ptr<float>(top);
  const float* lower = grid_.ptr<float>(std::min(top + 1, grid_.rows - 1));
  for (std::size_t i = 0; i < count; ++i) {
    const double u = knot((x + static_cast<double>(i) - middle) / cell_px, grid_.cols);
    const auto left = static_cast<int>(u);
    const int right = std::min(left + 1, grid_.cols - 1);
    const auto beside = static_cast<float>(u - left);
    const float at_left = upper[left] + below * (lower[left] - upper[left]);
    const float at_right = upper[right] + below * (lower[right] - upper[right]);
    values[i] = at_left + beside * (at_right - at_left);
  }
}

}  // namespace wavefount
