#include <algorithm>
#include <cmath>

#include "segments.h"
#include "wavefount/tracking/assignment.h"

namespace wavefount::tracking {
namespace {

/// Displacements beyond this many standard deviations an axis are not motion from step to step.
constexpr double gate_sd = 6;
/// Never farther than this share of the distance between nuclei.
constexpr double gate_share_of_spacing = 0.6;
/// A change of area or brightness weighs no more than this: outlines fail now and then.
constexpr double most_look_cost = 3;
/// Brightness and area together within some two standard deviations of a step's change.
constexpr double alike_cost = 2.5;
/// Two misses in a row happen; three at five missed in a hundred once in eight thousand. A longer
/// run is bridged only while it is shorter than the shortest mitosis would be by far.
constexpr int missed_steps = 3;
constexpr double missed_min = 2;
/// −log of a miss of one detection in twenty.
constexpr double miss_cost = 3;
/// A nucleus never loses this part of its brightness between two sightings but by mitosis.
constexpr double lost_log_ratio = -0.6;

double look_cost(const Motion& motion, const Detection& from, const Detection& to, double steps) {
  const auto squared = [&](double ratio, double sd) {
    const double deviations = ratio / (sd * std::max(1.0, steps));
    return std::min(most_look_cost, deviations * deviations / 2);
  };
  return squared(log_ratio(to.brightness, from.brightness), motion.log_brightness_sd) +
         squared(log_ratio(to.area_um2, from.area_um2), motion.log_area_sd);
}

/// Whether two sightings may be one nucleus: within the statistical gate, or within the nucleus'
/// own outline, where it was anyhow, if it also looks the same.
bool within_gate(const FilmDetections& film, const Motion& motion, const Detection& from,
                 const Detection& to, double away_um, double minutes) {
  const double statistical = std::min(gate_sd * std::sqrt(motion.variance(minutes)),
                                      gate_share_of_spacing * film.spacing_um);
  if (away_um <= statistical) return true;
  return away_um <= std::max(from.radius_um, to.radius_um) &&
         look_cost(motion, from, to, minutes / film.interval_min) < alike_cost;
}

/// Cost of a row or column without partner: every pair within its gate may be made, yet never is
/// one good pair given up for two poor ones.
double alone_cost(const std::vector<AssignmentCandidate>& candidates) {
  double most = 0;
  for (const auto& one : candidates) most = std::max(most, one.cost);
  return most / 2 + 1;
}

std::vector<AssignmentCandidate> step_candidates(const FilmDetections& film, const Motion& motion,
                                                 const Flow& flow, int step) {
  std::vector<AssignmentCandidate> candidates;
  const int rows = film.first[step - 1], columns = film.first[step];
  const double minutes = film.time_min[step] - film.time_min[step - 1];
  for (int from = rows; from < columns; ++from) {
    const auto& one = film.all[from];
    const Point expected = one.place_um + flow.shift(one.place_um, step - 1, step);
    for (int to = columns; to < film.first[step + 1]; ++to) {
      const auto& other = film.all[to];
      const double away = distance(other.place_um, expected);
      if (!within_gate(film, motion, one, other, away, minutes)) continue;
      const double cost = displacement_cost(away, motion.variance(minutes)) +
                          look_cost(motion, one, other, minutes / film.interval_min);
      candidates.push_back({from - rows, to - columns, cost});
    }
  }
  return candidates;
}

bool could_be_missed(const FilmDetections& film, const Segment& before, const Segment& after) {
  const int gap = first_step(film, after) - last_step(film, before);
  if (gap < 2) return false;
  const double minutes = start_min(film, after) - end_min(film, before);
  if (gap - 1 > missed_steps && minutes > missed_min) return false;
  return log_ratio(start_brightness(film, after), end_brightness(film, before)) > lost_log_ratio;
}

std::vector<AssignmentCandidate> missed_candidates(const FilmDetections& film, const Motion& motion,
                                                   const Flow& flow,
                                                   const std::vector<Segment>& segments) {
  std::vector<AssignmentCandidate> candidates;
  for (int row = 0; row < static_cast<int>(segments.size()); ++row) {
    const auto& before = segments[row];
    const auto& from = film.all[before.detections.back()];
    // Segments are in order of their first step; those that start too late end the search.
    const auto start = std::partition_point(
        segments.begin(), segments.end(),
        [&](const Segment& other) { return first_step(film, other) < from.step + 2; });
    for (auto at = start; at != segments.end(); ++at) {
      const int gap = first_step(film, *at) - from.step;
      const double minutes = start_min(film, *at) - end_min(film, before);
      if (gap - 1 > missed_steps && minutes > missed_min) break;
      if (!could_be_missed(film, before, *at)) continue;
      const auto& to = film.all[at->detections.front()];
      const Point expected = from.place_um + flow.shift(from.place_um, from.step, to.step);
      const double away = distance(to.place_um, expected);
      if (!within_gate(film, motion, from, to, away, minutes)) continue;
      const double cost = displacement_cost(away, motion.variance(minutes)) +
                          look_cost(motion, from, to, minutes / film.interval_min) +
                          miss_cost * (gap - 1);
      candidates.push_back({row, static_cast<int>(at - segments.begin()), cost});
    }
  }
  return candidates;
}

}  // namespace

std::vector<Link> link_steps(const FilmDetections& film, const Motion& motion, const Flow& flow) {
  std::vector<Link> links;
  for (int step = 1; step < film.steps(); ++step) {
    const int rows = film.first[step - 1], columns = film.first[step];
    const auto candidates = step_candidates(film, motion, flow, step);
    const double alone = alone_cost(candidates);
    const std::vector<double> row_alone(static_cast<std::size_t>(columns - rows), alone);
    const std::vector<double> column_alone(static_cast<std::size_t>(film.first[step + 1] - columns),
                                           alone);
    const auto column_of = assign_or_leave(candidates, row_alone, column_alone);
    for (std::size_t row = 0; row < column_of.size(); ++row)
      if (column_of[row] >= 0)
        links.push_back({rows + static_cast<int>(row), columns + column_of[row]});
  }
  return links;
}

std::vector<Segment> close_missed(const FilmDetections& film, const Motion& motion,
                                  const Flow& flow, const std::vector<Segment>& segments) {
  const auto candidates = missed_candidates(film, motion, flow, segments);
  const std::vector<double> alone(segments.size(), alone_cost(candidates));
  const auto next = assign_or_leave(candidates, alone, alone);
  auto links = links_of(segments);
  for (std::size_t row = 0; row < next.size(); ++row)
    if (next[row] >= 0)
      links.push_back({segments[row].detections.back(), segments[next[row]].detections.front()});
  return segments_of(film, links);
}

}  // namespace wavefount::tracking
