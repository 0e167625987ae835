#include "wavefount/nuclei/measure_places.h"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <utility>

#include "wavefount/nuclei/aperture.h"
#include "wavefount/nuclei/track_place.h"
#include "wavefount/nuclei/tube_mask.h"

namespace wavefount::nuclei {
namespace {

/// A smaller aperture than this, in reduced pixels, is all rim.
constexpr double least_aperture_px = 1.5;

class SecondTouch {
 public:
  SecondTouch(const PlacesInput& input, Nuclei& nuclei)
      : input_(input), nuclei_(nuclei), grid_(grid_of(input.reduced)) {
    Tubes tubes;
    tubes.tubes.push_back(input.tube);
    tubes_ = std::move(tubes);
    for (const Nucleus& nucleus : nuclei.nuclei) {
      tracks_.emplace_back(nucleus);
      ApertureTrace trace;
      trace.radius_um = std::max(tracks_.back().aperture_radius_um(), least_radius_um());
      const double reduced_um = grid_.factor * input_.film.pixel_um;
      const Ring ring = ring_around(trace.radius_um / reduced_um);
      trace.ring_from_um = ring.inner_px * reduced_um;
      trace.ring_to_um = ring.outer_px * reduced_um;
      traces_.traces.push_back(std::move(trace));
      missing_.emplace_back();
    }
  }

  ApertureTraces run() {
    const int frames = std::min({input_.reduced.frames(), input_.film.frames,
                                 static_cast<int>(input_.film.times_min.size())});
    for (int frame = 0; frame < frames; ++frame)
      if (usable(frame)) read_frame(frame);
    for (std::size_t i = 0; i < nuclei_.nuclei.size(); ++i) complete(i);
    return std::move(traces_);
  }

 private:
  static ReducedGrid grid_of(const ReducedFilm& film) {
    return {film.left(), film.top(), film.factor(), film.width(), film.height()};
  }

  double least_radius_um() const { return least_aperture_px * grid_.factor * input_.film.pixel_um; }

  bool usable(int frame) const {
    const auto& frames = input_.observations.frames;
    const auto index = static_cast<std::size_t>(frame);
    return index >= frames.size() || frames[index].usable;
  }

  Point drift_px(int frame) const {
    const auto index = static_cast<std::size_t>(frame);
    if (index >= input_.drift.x_px.size() || index >= input_.drift.y_px.size()) return {};
    return {input_.drift.x_px[index], input_.drift.y_px[index]};
  }

  bool wanted(std::size_t nucleus, double time_min) const {
    const TrackPlace& track = tracks_[nucleus];
    return track.known() && time_min >= track.first_min() - input_.before_min &&
           time_min <= track.last_min() + input_.after_min;
  }

  /// Place in full-size pixels of the frame as recorded.
  Point place_px(std::size_t nucleus, int frame, double time_min) const {
    const Point place_um = tracks_[nucleus].at(time_min);
    const Point drift = drift_px(frame);
    return {place_um.x / input_.film.pixel_um + drift.x,
            place_um.y / input_.film.pixel_um + drift.y};
  }

  void read_frame(int frame) {
    const double time_min = input_.film.times_min[static_cast<std::size_t>(frame)];
    std::vector<std::size_t> here;
    std::vector<Disc> discs;
    for (std::size_t i = 0; i < tracks_.size(); ++i) {
      if (!wanted(i, time_min)) continue;
      const Point place = place_px(i, frame, time_min);
      here.push_back(i);
      discs.push_back({grid_.column(place.x), grid_.row(place.y),
                       traces_.traces[i].radius_um / (input_.film.pixel_um * grid_.factor)});
    }
    if (here.empty()) return;
    const ImagePointer image = input_.reduced.read(frame);
    const cv::Mat1f pixels(as_matrix(*image));
    const Point drift = drift_px(frame);
    const TubeMask mask(tubes_, grid_, input_.film.pixel_um, drift.x, drift.y);
    for (std::size_t i = 0; i < here.size(); ++i) {
      const auto reading = read_aperture(pixels, mask.pixels(), discs[i], near(discs, i),
                                         input_.camera, grid_.factor * grid_.factor);
      if (reading.valid) add(here[i], frame, time_min, reading);
    }
  }

  static std::vector<Disc> near(const std::vector<Disc>& discs, std::size_t index) {
    std::vector<Disc> others;
    const Disc& own = discs[index];
    for (std::size_t i = 0; i < discs.size(); ++i) {
      if (i == index) continue;
      const double reach = 5 * own.radius + 10 + 2 * discs[i].radius;
      if (std::abs(discs[i].x - own.x) < reach && std::abs(discs[i].y - own.y) < reach)
        others.push_back(discs[i]);
    }
    return others;
  }

  void add(std::size_t nucleus, int frame, double time_min, const ApertureReading& reading) {
    ApertureTrace& trace = traces_.traces[nucleus];
    trace.frame.push_back(frame);
    trace.time_min.push_back(time_min);
    trace.signal.push_back(reading.signal);
    trace.variance.push_back(reading.variance);
    const TrackPlace& track = tracks_[nucleus];
    if (frame > track.first_frame() && frame < track.last_frame())
      missing_[nucleus].push_back(unseen(nucleus, frame, time_min, reading));
  }

  /// The point of a frame in which the nucleus was not found.
  TracePoint unseen(std::size_t nucleus, int frame, double time_min,
                    const ApertureReading& reading) const {
    const Point place = place_px(nucleus, frame, time_min);
    const Point place_um = tracks_[nucleus].at(time_min);
    const double radius_um = traces_.traces[nucleus].radius_um;
    const double radius_px = radius_um / input_.film.pixel_um;
    TracePoint point;
    point.frame = frame;
    point.time_min = time_min;
    point.x_px = place.x;
    point.y_px = place.y;
    point.x_um = place_um.x;
    point.y_um = place_um.y;
    point.radius_um = radius_um;
    point.brightness = reading.signal;
    point.brightness_variance = reading.variance;
    point.cytoplasm = reading.surroundings;
    point.integrated = reading.signal * std::numbers::pi * radius_px * radius_px;
    return point;
  }

  /// Found points as they are, between them every frame in which the place could be measured; a
  /// point without a measurement would be a made-up zero.
  void complete(std::size_t nucleus) {
    auto& points = nuclei_.nuclei[nucleus].points;
    std::vector<TracePoint> merged;
    auto next = missing_[nucleus].begin();
    const auto end = missing_[nucleus].end();
    for (TracePoint& point : points) {
      while (next != end && next->frame < point.frame) merged.push_back(*next++);
      const bool measured = next != end && next->frame == point.frame;
      if (point.found) merged.push_back(std::move(point));
      if (!measured) continue;
      if (merged.empty() || merged.back().frame != next->frame) {
        next->doubtful = point.doubtful;
        merged.push_back(*next);
      }
      ++next;
    }
    points = std::move(merged);
  }

  const PlacesInput& input_;
  Nuclei& nuclei_;
  ReducedGrid grid_;
  Tubes tubes_;
  std::vector<TrackPlace> tracks_;
  ApertureTraces traces_;
  std::vector<std::vector<TracePoint>> missing_;
};

}  // namespace

ApertureTraces measure_places(const PlacesInput& input, Nuclei& nuclei) {
  return SecondTouch(input, nuclei).run();
}

}  // namespace wavefount::nuclei
