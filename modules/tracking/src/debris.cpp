#include <algorithm>
#include <cmath>

#include "chains.h"
#include "wavefount/core/robust.h"

namespace wavefount::tracking {
namespace {

/// Whole interphases, and nuclei that show them, without which a film says nothing of cycling.
constexpr std::size_t fewest_interphases = 4;
constexpr int fewest_cycling = 2;
/// What stays this much longer than nearly all whole interphases of the film has missed a mitosis.
constexpr double overdue = 1.5;
/// A thing that is gone this many steps before the film's end has emptied, or left the view.
constexpr int gone_steps = 5;
/// Change of brightness within an interphase's time, as a share of what cycling nuclei show, below
/// which a thing is static.
constexpr double static_share = 0.5;

/// Where nothing cycles in this time, longer than cycles of extract and embryos take, a thing must
/// have changed by this much (natural logarithm) in brightness or area to be taken for a nucleus.
constexpr double silent_min = 75;
constexpr double silent_change = 0.15;

struct Cycling {
  std::vector<double> durations_min;  ///< of whole interphases
  std::vector<double> ranges;         ///< of log brightness within them
  int nuclei = 0;
};

/// 5 to 95 % range of the log brightness of detections [from, to).
double log_range(const FilmDetections& film, const std::vector<int>& detections, std::size_t from,
                 std::size_t to) {
  std::vector<double> values;
  for (std::size_t i = from; i < to; ++i)
    values.push_back(log_ratio(film.all[detections[i]].brightness, 1));
  return quantile(values, 0.95) - quantile(values, 0.05);
}

/// Interphases between two mitoses, both seen.
Cycling cycling_of(const FilmDetections& film, const std::vector<Segment>& segments,
                   const Lineage& lineage, const std::vector<Chain>& chains) {
  Cycling cycling;
  for (const auto& chain : chains) {
    const auto before = cycling.durations_min.size();
    for (std::size_t i = 1; i + 1 < chain.segments.size(); ++i) {
      const int one = chain.segments[i];
      if (lineage.mitosis_min[one] <= 0 || lineage.mitosis_min[chain.segments[i + 1]] <= 0)
        continue;
      const auto& detections = segments[one].detections;
      cycling.durations_min.push_back(longest_min(film, segments[one]));
      cycling.ranges.push_back(log_range(film, detections, 0, detections.size()));
    }
    if (cycling.durations_min.size() > before) ++cycling.nuclei;
  }
  return cycling;
}

/// Median range of log brightness over windows as long as an interphase, so that bleaching over
/// hours is not taken for filling.
double windowed_range(const FilmDetections& film, const std::vector<int>& detections,
                      double window_min) {
  std::vector<double> ranges;
  std::size_t from = 0;
  for (std::size_t to = 1; to <= detections.size(); ++to) {
    const bool last = to == detections.size();
    if (!last && film.time_of(detections[to]) - film.time_of(detections[from]) < window_min)
      continue;
    ranges.push_back(log_range(film, detections, from, to));
    from = to;
  }
  return median(std::move(ranges));
}

/// Largest difference between the median logarithms of the three thirds of a series.
double change_of_thirds(const FilmDetections& film, const std::vector<int>& detections,
                        double Detection::*quantity) {
  std::vector<double> medians;
  for (std::size_t third = 0; third < 3; ++third) {
    std::vector<double> values;
    for (std::size_t i = third * detections.size() / 3; i < (third + 1) * detections.size() / 3;
         ++i)
      values.push_back(log_ratio(film.all[detections[i]].*quantity, 1));
    medians.push_back(median(std::move(values)));
  }
  const auto [least, most] = std::minmax_element(medians.begin(), medians.end());
  return *most - *least;
}

bool lasts(const FilmDetections& film, const std::vector<int>& detections, double minutes) {
  return film.time_of(detections.back()) - film.time_of(detections.front()) >= minutes &&
         film.all[detections.back()].step + gone_steps >= film.steps();
}

/// In a film without a single mitosis: what neither fills nor grows nor fades for longer than a
/// cycle takes.
std::vector<bool> find_still(const FilmDetections& film, const std::vector<Segment>& segments,
                             const std::vector<Chain>& chains) {
  std::vector<bool> still(chains.size(), false);
  for (std::size_t i = 0; i < chains.size(); ++i) {
    const auto detections = detections_of(segments, chains[i]);
    still[i] = lasts(film, detections, silent_min) &&
               change_of_thirds(film, detections, &Detection::brightness) < silent_change &&
               change_of_thirds(film, detections, &Detection::area_um2) < silent_change;
  }
  return still;
}

bool any_mitosis(const Lineage& lineage) {
  return std::any_of(lineage.mitosis_min.begin(), lineage.mitosis_min.end(),
                     [](double minutes) { return minutes > 0; });
}

}  // namespace

std::vector<bool> find_debris(const FilmDetections& film, const std::vector<Segment>& segments,
                              const Lineage& lineage, const std::vector<Chain>& chains) {
  if (!any_mitosis(lineage)) return find_still(film, segments, chains);
  std::vector<bool> debris(chains.size(), false);
  const auto cycling = cycling_of(film, segments, lineage, chains);
  if (cycling.durations_min.size() < fewest_interphases || cycling.nuclei < fewest_cycling)
    return debris;
  const double longest = overdue * quantile(cycling.durations_min, 0.95);
  const double window = median(cycling.durations_min);
  const double least_range = static_share * median(cycling.ranges);
  for (std::size_t i = 0; i < chains.size(); ++i) {
    const bool cycled = std::any_of(chains[i].segments.begin(), chains[i].segments.end(),
                                    [&](int segment) { return lineage.mitosis_min[segment] > 0; });
    if (cycled) continue;
    const auto detections = detections_of(segments, chains[i]);
    if (!lasts(film, detections, longest)) continue;
    debris[i] = windowed_range(film, detections, window) < least_range;
  }
  return debris;
}

}  // namespace wavefount::tracking
