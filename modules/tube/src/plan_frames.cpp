#include <algorithm>
#include <cmath>
#include <limits>
#include <opencv2/core/mat.hpp>

#include "wavefount/core/robust.h"
#include "wavefount/tube/binning.h"
#include "wavefount/tube/frame_plan.h"
#include "wavefount/tube/keyframes.h"
#include "wavefount/tube/polygon_mask.h"

namespace wavefount::tube {
namespace {

/// Reduced pixels beside the tube that edges and their surroundings need.
constexpr int least_margin_px = 8;
/// Bright nuclei of a float film may reach this many times the range seen ahead.
constexpr double headroom = 4;
/// Nuclei tell of the stage only when this share of their edges lies upon others.
constexpr double nuclei_agreement = 0.65;

ImagePointer cropped(const Image& image, int left, int top, int width, int height) {
  auto part = make_image(width, height);
  as_matrix(image)(cv::Rect(left, top, width, height)).copyTo(as_matrix(*part));
  return part;
}

cv::Mat tube_mask(const FilmDescription& film, const Tubes& tubes, const ReducedFilm& reduced) {
  const cv::Size size(reduced.width(), reduced.height());
  const auto local = [&](const Polygon& polygon_um) {
    Polygon out;
    for (const auto& one : polygon_um)
      out.push_back({to_reduced_px(one.x / film.pixel_um - reduced.left(), reduced.factor()),
                     to_reduced_px(one.y / film.pixel_um - reduced.top(), reduced.factor())});
    return out;
  };
  cv::Mat mask = cv::Mat::zeros(size, CV_8U);
  for (const auto& tube : tubes.tubes) {
    cv::Mat one = polygon_mask(local(tube.outline_um), size);
    for (const auto& hole : tube.holes_um) one.setTo(0, polygon_mask(local(hole), size));
    mask.setTo(255, one);
  }
  return mask;
}

std::vector<Span> spans_of(const cv::Mat& mask) {
  std::vector<Span> spans;
  for (int y = 0; y < mask.rows; ++y) {
    const auto* row = mask.ptr<unsigned char>(y);
    for (int x = 0; x < mask.cols; ++x) {
      if (!row[x]) continue;
      const int first = x;
      while (x < mask.cols && row[x]) ++x;
      spans.push_back({y, first, x});
    }
  }
  return spans;
}

double mean_inside(const Image& image, const std::vector<Span>& spans) {
  const int width = image_width(image);
  double sum = 0;
  double count = 0;
  for (const auto& span : spans) {
    const float* row = image.GetBufferPointer() + static_cast<std::ptrdiff_t>(span.y) * width;
    for (int x = span.first; x < span.last; ++x) sum += row[x];
    count += span.last - span.first;
  }
  return count > 0 ? sum / count : 0;
}

/// Lowest and highest value of all images read ahead.
std::pair<double, double> range_of(const Prescan& prescan) {
  double lowest = std::numeric_limits<double>::infinity();
  double highest = -lowest;
  for (const auto& image : prescan.images) {
    const auto size = image->GetLargestPossibleRegion().GetNumberOfPixels();
    const auto [low, high] =
        std::minmax_element(image->GetBufferPointer(), image->GetBufferPointer() + size);
    lowest = std::min(lowest, static_cast<double>(*low));
    highest = std::max(highest, static_cast<double>(*high));
  }
  return {lowest, highest};
}

}  // namespace

CropPlan plan_crop(const FilmDescription& film, const Prescan& prescan, const Tubes& tubes,
                   double margin_um) {
  double left = std::numeric_limits<double>::infinity();
  double top = left;
  double right = -left;
  double bottom = -left;
  for (const auto& tube : tubes.tubes) {
    for (const auto& one : tube.outline_um) {
      left = std::min(left, one.x / film.pixel_um);
      right = std::max(right, one.x / film.pixel_um);
      top = std::min(top, one.y / film.pixel_um);
      bottom = std::max(bottom, one.y / film.pixel_um);
    }
  }
  const int factor = prescan.factor;
  const double margin = std::max(margin_um / film.pixel_um, 1.0 * least_margin_px * factor);
  const auto drift = [](const std::vector<double>& shifts) {
    const auto [low, high] = std::minmax_element(shifts.begin(), shifts.end());
    return std::pair(std::min(0.0, *low), std::max(0.0, *high));
  };
  const auto [left_drift, right_drift] = drift(prescan.shift_x_px);
  const auto [up_drift, down_drift] = drift(prescan.shift_y_px);
  const auto cells = [factor](double from, double to, int size) {
    const int most = size / factor;
    const int first = static_cast<int>(std::clamp(std::floor(from / factor), 0.0, most - 1.0));
    const int last = static_cast<int>(
        std::clamp(std::ceil((to + 1) / factor), first + 1.0, static_cast<double>(most)));
    return std::pair(first, last - first);
  };
  const auto [x, width] =
      cells(left + left_drift - margin, right + right_drift + margin, film.width);
  const auto [y, height] =
      cells(top + up_drift - margin, bottom + down_drift + margin, film.height);
  CropPlan crop{x * factor, y * factor, width, height, 0, 65535};
  const auto [lowest, highest] = range_of(prescan);
  if (film.bit_depth < 32) {
    // The camera's whole range: steps of 1/16 count at 12 bit; at 16 bit a step is one count, so
    // the range seen ahead is spread out, with room for nuclei to grow brighter.
    const double full = (std::ldexp(1.0, film.bit_depth) - 1) * film.z_planes;
    crop.highest = std::min(full, std::max(lowest + headroom * (highest - lowest), 256.0));
  } else {
    crop.lowest = std::min(0.0, lowest - (highest - lowest));
    crop.highest = lowest + 2 * headroom * (highest - lowest);
  }
  return crop;
}

std::shared_ptr<ReducedFilm> make_reduced_film(const FilmDescription& film, const Prescan& prescan,
                                               const CropPlan& crop,
                                               const std::filesystem::path& scratch) {
  return std::make_shared<ReducedFilm>(scratch / "reduced.bin", film.frames, prescan.factor,
                                       crop.left, crop.top, crop.width, crop.height, crop.lowest,
                                       crop.highest);
}

FramePlan plan_frames(const FilmDescription& film, const Prescan& prescan,
                      const CameraModel& camera, const Tubes& tubes, const ReducedFilm& reduced,
                      double largest_radius_um) {
  FramePlan plan;
  plan.inside = spans_of(tube_mask(film, tubes, reduced));
  plan.keyframes = prescan.frames;
  plan.saturation_counts = camera.saturation_counts;
  plan.pixel_um = film.pixel_um;
  const int left = reduced.left() / reduced.factor();
  const int top = reduced.top() / reduced.factor();
  const auto part = [&](const Image& image) {
    return cropped(image, left, top, reduced.width(), reduced.height());
  };
  for (std::size_t k = 0; k < prescan.images.size(); ++k) {
    plan.key_x.push_back(prescan.shift_x_px[k] / reduced.factor());
    plan.key_y.push_back(prescan.shift_y_px[k] / reduced.factor());
  }
  const auto parts = [&] {
    std::vector<ImagePointer> images;
    for (const auto& image : prescan.images) images.push_back(part(*image));
    return images;
  }();
  const auto still = combine_at(parts, plan.key_x, plan.key_y);
  plan.blob_px = 2 * largest_radius_um / (film.pixel_um * reduced.factor());
  plan.standing = std::make_unique<ShiftReference>(*still.median, still.spread.GetPointer());
  plan.coarse = std::make_unique<ShiftReference>(*opened_thumb(*still.median, plan.blob_px).image);
  std::vector<double> agreements;
  for (std::size_t k = 0; k < parts.size(); ++k) {
    plan.key_light.push_back(mean_inside(*parts[k], plan.inside));
    plan.keys.emplace_back(*parts[k], nullptr, nuclei_agreement);
    agreements.push_back(
        plan.standing->find(MovingImage(*parts[k]), plan.key_x[k], plan.key_y[k], false).agreement);
  }
  plan.expected_agreement = median(std::move(agreements));
  std::vector<double> darkest;
  const auto low = part(*prescan.low);
  const auto count = low->GetLargestPossibleRegion().GetNumberOfPixels();
  darkest.assign(low->GetBufferPointer(), low->GetBufferPointer() + count);
  plan.dark_counts = std::max(camera.dark_offset_counts,
                              camera.offset_given ? 0.0 : quantile(std::move(darkest), 0.01));
  return plan;
}

ExpectedShift expected_shift(const FramePlan& plan, int frame) {
  ExpectedShift expected;
  if (plan.keyframes.empty()) return expected;
  const auto above = std::lower_bound(plan.keyframes.begin(), plan.keyframes.end(), frame);
  const auto last = plan.keyframes.size() - 1;
  expected.after = std::min(static_cast<std::size_t>(above - plan.keyframes.begin()), last);
  expected.before = expected.after;
  if (expected.after > 0 && plan.keyframes[expected.after] > frame) --expected.before;
  const int gap = plan.keyframes[expected.after] - plan.keyframes[expected.before];
  if (gap > 0)
    expected.after_share = static_cast<double>(frame - plan.keyframes[expected.before]) / gap;
  const auto between = [&](const std::vector<double>& values) {
    return values[expected.before] +
           expected.after_share * (values[expected.after] - values[expected.before]);
  };
  expected.x = between(plan.key_x);
  expected.y = between(plan.key_y);
  return expected;
}

}  // namespace wavefount::tube
