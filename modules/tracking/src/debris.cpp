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
/// A thing this much fainter than the film's cycling nuclei at their brightest (natural logarithm:
/// a fifth), which does not rise either, is unevenness of the cytoplasm or of the wall's glow.
constexpr double faint_log = -1.6;
constexpr double faint_rise = 0.4;
/// Cycling nuclei needed to say how bright a nucleus gets.
constexpr std::size_t fewest_bright = 3;

struct Cycling {
  std::vector<double> durations_min;  ///< of whole interphases
  std::vector<double> ranges;         ///< change of log brightness within them
  int nuclei = 0;
};

/// Median logarithms of a quantity over so many successive, equal parts of a series: without its
/// noise from frame to frame.
std::vector<double> log_levels(const FilmDetections& film, const std::vector<int>& detections,
                               double Detection::*quantity, std::size_t parts) {
  std::vector<double> levels;
  for (std::size_t part = 0; part < parts; ++part) {
    std::vector<double> values;
    const auto end = (part + 1) * detections.size() / parts;
    for (std::size_t i = part * detections.size() / parts; i < end; ++i)
      values.push_back(log_ratio(film.all[detections[i]].*quantity, 1));
    if (!values.empty()) levels.push_back(median(std::move(values)));
  }
  return levels;
}

double log_change(const FilmDetections& film, const std::vector<int>& detections,
                  double Detection::*quantity, std::size_t parts) {
  const auto levels = log_levels(film, detections, quantity, parts);
  const auto [least, most] = std::minmax_element(levels.begin(), levels.end());
  return *most - *least;
}

/// What an interphase changes: its parts in a row show the rise, and each part holds several
/// frames.
double brightness_change(const FilmDetections& film, const std::vector<int>& detections) {
  constexpr std::size_t parts = 6;
  return log_change(film, detections, &Detection::brightness, parts);
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
      cycling.ranges.push_back(brightness_change(film, detections));
    }
    if (cycling.durations_min.size() > before) ++cycling.nuclei;
  }
  return cycling;
}

/// Median change of log brightness over windows as long as an interphase, so that bleaching over
/// hours is not taken for filling.
double windowed_range(const FilmDetections& film, const std::vector<int>& detections,
                      double window_min) {
  std::vector<double> ranges;
  std::size_t from = 0;
  for (std::size_t to = 1; to <= detections.size(); ++to) {
    const bool last = to == detections.size();
    if (!last && film.time_of(detections[to]) - film.time_of(detections[from]) < window_min)
      continue;
    ranges.push_back(
        brightness_change(film, {detections.begin() + static_cast<std::ptrdiff_t>(from),
                                 detections.begin() + static_cast<std::ptrdiff_t>(to)}));
    from = to;
  }
  return median(std::move(ranges));
}

bool cycled(const Lineage& lineage, const Chain& chain) {
  return std::any_of(chain.segments.begin(), chain.segments.end(),
                     [&](int segment) { return lineage.mitosis_min[segment] > 0; });
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
               log_change(film, detections, &Detection::brightness, 3) < silent_change &&
               log_change(film, detections, &Detection::area_um2, 3) < silent_change;
  }
  return still;
}

bool any_mitosis(const Lineage& lineage) {
  return std::any_of(lineage.mitosis_min.begin(), lineage.mitosis_min.end(),
                     [](double minutes) { return minutes > 0; });
}

double brightest(const FilmDetections& film, const std::vector<int>& detections) {
  std::vector<double> values;
  for (const int one : detections) values.push_back(film.all[one].brightness);
  return quantile(std::move(values), 0.9);
}

/// What never gets near the brightness of the film's cycling nuclei and does not rise towards it:
/// a nucleus just formed is faint as well, but fills.
std::vector<bool> find_faint(const FilmDetections& film, const std::vector<Segment>& segments,
                             const Lineage& lineage, const std::vector<Chain>& chains) {
  std::vector<bool> faint(chains.size(), false);
  std::vector<std::vector<int>> detections;
  std::vector<double> cycling;
  for (const auto& chain : chains) {
    detections.push_back(detections_of(segments, chain));
    if (cycled(lineage, chain)) cycling.push_back(brightest(film, detections.back()));
  }
  if (cycling.size() < fewest_bright) return faint;
  const double typical = median(std::move(cycling));
  for (std::size_t i = 0; i < chains.size(); ++i) {
    if (log_ratio(brightest(film, detections[i]), typical) > faint_log) continue;
    const auto levels = log_levels(film, detections[i], &Detection::brightness, 3);
    faint[i] = levels.back() - levels.front() < faint_rise;
  }
  return faint;
}

}  // namespace

std::vector<bool> find_debris(const FilmDetections& film, const std::vector<Segment>& segments,
                              const Lineage& lineage, const std::vector<Chain>& chains) {
  if (!any_mitosis(lineage)) return find_still(film, segments, chains);
  auto debris = find_faint(film, segments, lineage, chains);
  const auto cycling = cycling_of(film, segments, lineage, chains);
  if (cycling.durations_min.size() < fewest_interphases || cycling.nuclei < fewest_cycling)
    return debris;
  const double longest = overdue * quantile(cycling.durations_min, 0.95);
  const double window = median(cycling.durations_min);
  const double least_range = static_share * median(cycling.ranges);
  for (std::size_t i = 0; i < chains.size(); ++i) {
    if (cycled(lineage, chains[i])) continue;
    const auto detections = detections_of(segments, chains[i]);
    if (!lasts(film, detections, longest)) continue;
    if (windowed_range(film, detections, window) < least_range) debris[i] = true;
  }
  return debris;
}

}  // namespace wavefount::tracking
