#include "evidence.h"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "wavefount/core/robust.h"

namespace wavefount::tracking {
namespace {

/// False segments of a length expected in the whole film, beyond which that length proves nothing.
constexpr double tolerated_false = 0.05;
/// Fewer sightings than this over less than a fifth of the film's interphase are no interphase.
constexpr int certain_length = 4;
constexpr double shortest_share = 0.2;
/// Single sightings below which their share that repeats cannot be estimated.
constexpr int enough_singles = 20;
/// Light that spreads after a release is gone well within this part of an interphase.
constexpr double cloud_share = 0.3;

bool touches_film_edge(const FilmDetections& film, const Segment& segment) {
  return at_film_start(film, segment) || at_film_end(film, segment);
}

double interphase_of(const FilmDetections& film, const std::vector<Segment>& segments) {
  std::vector<double> weighted;
  for (const auto& segment : segments)
    weighted.insert(weighted.end(), segment.detections.size(), longest_min(film, segment));
  return median(std::move(weighted));
}

/// Expected number of false segments by length: each false alarm is followed by another at its
/// place with a chance that follows from their density, or from how often short ones repeat.
struct FalseLengths {
  double singles = 1;
  double repeat = 0;

  double expected(int length) const { return singles * std::pow(repeat, length - 1); }
};

FalseLengths false_lengths(const FilmDetections& film, const Motion& motion,
                           const std::vector<Segment>& segments, double interphase_min) {
  double singles = 0, pairs = 0;
  for (const auto& segment : segments) {
    if (touches_film_edge(film, segment)) continue;
    if (segment.length() == 1) ++singles;
    if (segment.length() == 2 && longest_min(film, segment) < shortest_share * interphase_min)
      ++pairs;
  }
  const double reach = std::max(6 * std::sqrt(motion.variance(film.interval_min)), film.radius_um);
  FalseLengths lengths;
  lengths.singles = std::max(1.0, singles);
  lengths.repeat = singles / film.steps() * std::numbers::pi * reach * reach / film.area_um2;
  if (singles >= enough_singles) lengths.repeat = std::max(lengths.repeat, pairs / singles);
  lengths.repeat = std::min(lengths.repeat, 0.5);
  return lengths;
}

/// Light that spreads after a nucleus has let go: starts where and when one ends, fades from the
/// first, and is soon gone.
bool is_cloud(const FilmDetections& film, const Motion& motion, const Segment& segment,
              const std::vector<Segment>& segments, double interphase_min) {
  if (longest_min(film, segment) > cloud_share * interphase_min) return false;
  const auto& first = film.all[segment.detections.front()];
  if (film.all[segment.detections.back()].brightness > first.brightness) return false;
  for (const auto& other : segments) {
    if (other.length() <= segment.length()) continue;
    const double late = start_min(film, segment) - end_min(film, other);
    const int steps = first_step(film, segment) - last_step(film, other);
    if (late <= 0 || (steps > 2 && late > 1)) continue;
    const double away = distance(first.place_um, end_place(film, other));
    const double reach = first.radius_um + 6 * std::sqrt(motion.variance(late));
    if (away < reach && first.brightness < end_brightness(film, other)) return true;
  }
  return false;
}

}  // namespace

Evidence weigh_segments(const FilmDetections& film, const Motion& motion,
                        const std::vector<Segment>& segments) {
  Evidence evidence;
  evidence.weak.assign(segments.size(), false);
  evidence.interphase_min = interphase_of(film, segments);
  // What is seen in one frame only of a film of one frame has had no chance to be seen again.
  if (film.steps() < 2) return evidence;
  const auto lengths = false_lengths(film, motion, segments, evidence.interphase_min);
  evidence.false_density =
      lengths.singles / (film.area_um2 * std::max(film.duration_min(), film.interval_min));
  for (std::size_t i = 0; i < segments.size(); ++i) {
    const auto& segment = segments[i];
    if (segment.length() == film.steps()) continue;
    const bool brief = longest_min(film, segment) < shortest_share * evidence.interphase_min;
    evidence.weak[i] =
        segment.length() == 1 || lengths.expected(segment.length()) > tolerated_false ||
        (brief && segment.length() < certain_length && !touches_film_edge(film, segment)) ||
        is_cloud(film, motion, segment, segments, evidence.interphase_min);
  }
  return evidence;
}

bool stands_alone(const FilmDetections& film, const Evidence& evidence,
                  const std::vector<Segment>& segments, int segment) {
  if (!touches_film_edge(film, segments[segment])) return false;
  std::vector<double> clear, own;
  for (std::size_t i = 0; i < segments.size(); ++i)
    if (!evidence.weak[i])
      for (const int one : segments[i].detections) clear.push_back(film.all[one].sigma);
  for (const int one : segments[segment].detections) own.push_back(film.all[one].sigma);
  return median(std::move(own)) >= quantile(std::move(clear), 0.25);
}

}  // namespace wavefount::tracking
