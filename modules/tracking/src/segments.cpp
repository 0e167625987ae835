#include "segments.h"

#include <algorithm>

#include "wavefount/core/robust.h"

namespace wavefount::tracking {
namespace {

constexpr int few = 3;

Point median_place(const FilmDetections& film, const std::vector<int>& detections, std::size_t from,
                   std::size_t to) {
  std::vector<double> x, y;
  for (std::size_t i = from; i < to; ++i) {
    x.push_back(film.all[detections[i]].place_um.x);
    y.push_back(film.all[detections[i]].place_um.y);
  }
  return {median(std::move(x)), median(std::move(y))};
}

}  // namespace

int first_step(const FilmDetections& film, const Segment& segment) {
  return film.all[segment.detections.front()].step;
}

int last_step(const FilmDetections& film, const Segment& segment) {
  return film.all[segment.detections.back()].step;
}

double start_min(const FilmDetections& film, const Segment& segment) {
  return film.time_of(segment.detections.front());
}

double end_min(const FilmDetections& film, const Segment& segment) {
  return film.time_of(segment.detections.back());
}

Point start_place(const FilmDetections& film, const Segment& segment) {
  const auto count = segment.detections.size();
  return median_place(film, segment.detections, 0, std::min<std::size_t>(few, count));
}

Point end_place(const FilmDetections& film, const Segment& segment) {
  const auto count = segment.detections.size();
  return median_place(film, segment.detections, count - std::min<std::size_t>(few, count), count);
}

double end_brightness(const FilmDetections& film, const Segment& segment) {
  double most = 0;
  for (int i = std::max(0, segment.length() - few); i < segment.length(); ++i)
    most = std::max(most, film.all[segment.detections[i]].brightness);
  return most;
}

double start_brightness(const FilmDetections& film, const Segment& segment) {
  return film.all[segment.detections.front()].brightness;
}

double longest_min(const FilmDetections& film, const Segment& segment) {
  const int before = std::max(0, first_step(film, segment) - 1);
  const int after = std::min(film.steps() - 1, last_step(film, segment) + 1);
  return film.time_min[after] - film.time_min[before];
}

bool at_film_start(const FilmDetections& film, const Segment& segment) {
  return first_step(film, segment) <= 1;
}

bool at_film_end(const FilmDetections& film, const Segment& segment) {
  return last_step(film, segment) >= film.steps() - 2;
}

std::vector<Segment> segments_of(const FilmDetections& film, const std::vector<Link>& links) {
  std::vector<int> next(film.all.size(), -1);
  std::vector<bool> has_previous(film.all.size(), false);
  for (const auto& link : links) {
    next[link.from] = link.to;
    has_previous[link.to] = true;
  }
  std::vector<Segment> segments;
  for (int one = 0; one < static_cast<int>(film.all.size()); ++one) {
    if (has_previous[one]) continue;
    auto& segment = segments.emplace_back();
    for (int at = one; at >= 0; at = next[at]) segment.detections.push_back(at);
  }
  return segments;
}

std::vector<Link> links_of(const std::vector<Segment>& segments) {
  std::vector<Link> links;
  for (const auto& segment : segments)
    for (std::size_t i = 1; i < segment.detections.size(); ++i)
      links.push_back({segment.detections[i - 1], segment.detections[i]});
  return links;
}

Motion refine_motion(const FilmDetections& film, const std::vector<Segment>& segments,
                     const Flow& flow, Motion motion) {
  // Lag over which spread is told from the error of a place: several steps, and some minutes, yet
  // within an interphase.
  constexpr int lag = 6;
  std::vector<double> deviations, minutes;
  for (const auto& segment : segments)
    for (int i = 0; i + lag < segment.length(); i += lag) {
      const auto& from = film.all[segment.detections[i]];
      const auto& to = film.all[segment.detections[i + lag]];
      const Point off = to.place_um - from.place_um - flow.shift(from.place_um, from.step, to.step);
      deviations.insert(deviations.end(), {off.x, off.y});
      minutes.push_back(film.time_min[to.step] - film.time_min[from.step]);
    }
  if (minutes.size() < 8) return motion;
  const double one_step = motion.variance(film.interval_min);
  const double later = std::max(film.interval_min * 2, median(std::move(minutes)));
  const double sd = robust_sd(deviations);
  const double spread = std::max(0.0, sd * sd - one_step) / (later - film.interval_min);
  motion.spread_um2_per_min = std::min(spread, one_step / film.interval_min);
  motion.place_variance_um2 = one_step - motion.spread_um2_per_min * film.interval_min;
  return motion;
}

}  // namespace wavefount::tracking
