#include "wavefount/waves/chronology.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>
#include <utility>

#include "wavefount/core/robust.h"

namespace wavefount {
namespace {

struct Interval {
  double middle_min = 0;
  double length_min = 0;
};

/// One nucleus' entries and the time over which it was followed.
struct Track {
  std::vector<int> entries;
  Point first_um, last_um;
  double first_min = 0, last_min = 0;
};

std::vector<Track> tracks_of(const std::vector<WaveEntry>& entries, const Nuclei& nuclei) {
  std::map<int, Track> by_nucleus;
  for (int i = 0; i < static_cast<int>(entries.size()); ++i)
    by_nucleus[entries[i].nucleus].entries.push_back(i);
  std::map<int, const Nucleus*> followed;
  for (const auto& nucleus : nuclei.nuclei) followed[nucleus.id] = &nucleus;
  std::vector<Track> tracks;
  for (auto& [id, track] : by_nucleus) {
    std::stable_sort(track.entries.begin(), track.entries.end(),
                     [&](int a, int b) { return entries[a].time_min < entries[b].time_min; });
    const auto& first = entries[track.entries.front()];
    const auto& last = entries[track.entries.back()];
    track.first_um = {first.x_um, first.y_um};
    track.last_um = {last.x_um, last.y_um};
    track.first_min = first.time_min;
    track.last_min = last.time_min;
    if (const auto at = followed.find(id); at != followed.end() && !at->second->points.empty()) {
      track.first_min = std::min(track.first_min, at->second->points.front().time_min);
      track.last_min = std::max(track.last_min, at->second->points.back().time_min);
    }
    tracks.push_back(std::move(track));
  }
  std::stable_sort(tracks.begin(), tracks.end(), [](const Track& left, const Track& right) {
    return left.first_min < right.first_min;
  });
  return tracks;
}

std::vector<Station> stations_of(const std::vector<Track>& tracks, double spacing_um) {
  std::vector<Station> stations;
  for (const auto& track : tracks) {
    Station* best = nullptr;
    double nearest = spacing_um / 2;
    for (auto& station : stations) {
      const double away =
          std::hypot(station.place_um.x - track.first_um.x, station.place_um.y - track.first_um.y);
      if (station.last_min >= track.first_min || away > nearest) continue;
      nearest = away;
      best = &station;
    }
    if (best == nullptr) {
      stations.push_back({track.entries, track.last_um, track.first_min, track.last_min});
      continue;
    }
    best->entries.insert(best->entries.end(), track.entries.begin(), track.entries.end());
    best->place_um = track.last_um;
    best->last_min = track.last_min;
  }
  return stations;
}

/// A station stands at the median of its entries' places.
void place_stations(std::vector<Station>& stations, const std::vector<WaveEntry>& entries) {
  for (auto& station : stations) {
    std::vector<double> x, y;
    for (const int entry : station.entries) {
      x.push_back(entries[entry].x_um);
      y.push_back(entries[entry].y_um);
    }
    station.place_um = {median(std::move(x)), median(std::move(y))};
  }
}

std::vector<Interval> intervals_of(const std::vector<Station>& stations,
                                   const std::vector<WaveEntry>& entries) {
  std::vector<Interval> intervals;
  for (const auto& station : stations) {
    for (std::size_t i = 1; i < station.entries.size(); ++i) {
      const double from = entries[station.entries[i - 1]].time_min;
      const double to = entries[station.entries[i]].time_min;
      if (to > from) intervals.push_back({(from + to) / 2, to - from});
    }
  }
  return intervals;
}

/// Where no nucleus entered twice: an interphase with the mitosis after it is about a period.
double period_from_interphases(const Interphases& interphases, double mitosis_min) {
  std::vector<double> lengths;
  for (const auto& interphase : interphases.interphases) {
    if (interphase.start == Start::seen && interphase.entry && interphase.formed_min)
      lengths.push_back(interphase.entry->time_min - *interphase.formed_min);
  }
  return lengths.empty() ? 0 : median(std::move(lengths)) + mitosis_min;
}

/// Median of the intervals around a time that can be one period: near the period found nearby.
double period_near(const std::vector<Interval>& intervals, double time_min, double guess_min) {
  constexpr double least_share = 0.65;  // below: half a period, split by an extra entry
  constexpr double most_share = 1.5;    // above: two periods, one entry missing
  std::vector<double> near;
  for (const auto& interval : intervals) {
    const double ratio = interval.length_min / guess_min;
    if (std::abs(interval.middle_min - time_min) <= guess_min && ratio > least_share &&
        ratio < most_share)
      near.push_back(interval.length_min);
  }
  constexpr std::size_t enough = 3;
  return near.size() < enough ? guess_min : median(std::move(near));
}

PeriodCurve period_curve(const std::vector<Interval>& intervals) {
  std::vector<double> lengths, middles;
  for (const auto& interval : intervals) lengths.push_back(interval.length_min);
  const double mode = half_sample_mode(lengths);
  for (const auto& interval : intervals) {
    if (std::abs(interval.length_min / mode - 1) < 0.1) middles.push_back(interval.middle_min);
  }
  const double centre = middles.empty() ? intervals.front().middle_min : median(middles);
  double first = centre, last = centre;
  for (const auto& interval : intervals) {
    first = std::min(first, interval.middle_min);
    last = std::max(last, interval.middle_min);
  }
  const double step = mode / 2;
  std::vector<double> times, periods;
  double guess = mode;
  for (double time = centre; time > first - step; time -= step) {
    guess = period_near(intervals, time, guess);
    times.insert(times.begin(), time);
    periods.insert(periods.begin(), guess);
  }
  guess = periods.back();
  for (double time = centre + step; time < last + step; time += step) {
    guess = period_near(intervals, time, guess);
    times.push_back(time);
    periods.push_back(guess);
  }
  return {std::move(times), std::move(periods)};
}

double spacing_of(const std::vector<WaveEntry>& entries, const Territories& territories) {
  std::vector<double> nearest;
  for (const auto& one : territories.nearest_um) {
    if (one) nearest.push_back(*one);
  }
  if (!nearest.empty()) return median(std::move(nearest));
  std::vector<Point> places;
  for (const auto& entry : entries) places.push_back({entry.x_um, entry.y_um});
  return median_spacing_um(places);
}

}  // namespace

PeriodCurve::PeriodCurve(std::vector<double> times_min, std::vector<double> periods_min)
    : times_min_(std::move(times_min)), periods_min_(std::move(periods_min)) {}

double PeriodCurve::at(double time_min) const {
  if (!known()) return std::numeric_limits<double>::infinity();
  const auto later = std::upper_bound(times_min_.begin(), times_min_.end(), time_min);
  if (later == times_min_.begin()) return periods_min_.front();
  if (later == times_min_.end()) return periods_min_.back();
  const auto at = static_cast<std::size_t>(later - times_min_.begin());
  const double share = (time_min - times_min_[at - 1]) / (times_min_[at] - times_min_[at - 1]);
  return periods_min_[at - 1] + share * (periods_min_[at] - periods_min_[at - 1]);
}

double half_sample_mode(std::vector<double> values) {
  if (values.empty()) return 0;
  std::sort(values.begin(), values.end());
  auto begin = values.begin();
  auto count = values.size();
  while (count > 3) {
    const auto half = (count + 1) / 2;
    auto best = begin;
    for (auto at = begin;
         at + static_cast<std::ptrdiff_t>(half) <= begin + static_cast<std::ptrdiff_t>(count);
         ++at) {
      const auto width = [half](auto from) {
        return *(from + static_cast<std::ptrdiff_t>(half) - 1) - *from;
      };
      if (width(at) < width(best)) best = at;
    }
    begin = best;
    count = half;
  }
  return median({begin, begin + static_cast<std::ptrdiff_t>(count)});
}

Chronology chronology_of(const std::vector<WaveEntry>& entries, const Nuclei& nuclei,
                         const Interphases& interphases, const Tube& tube,
                         const Territories& territories, const NeighbourRules& rules) {
  Chronology chronology;
  // Nuclei are some ten µm wide; two at one place are one found twice.
  constexpr double least_spacing_um = 1;
  chronology.spacing_um = std::max(spacing_of(entries, territories), least_spacing_um);
  chronology.stations = stations_of(tracks_of(entries, nuclei), chronology.spacing_um);
  place_stations(chronology.stations, entries);
  std::vector<Point> places;
  for (const auto& station : chronology.stations) places.push_back(station.place_um);
  chronology.graph = neighbour_graph(places, tube, chronology.spacing_um, rules);
  if (const auto intervals = intervals_of(chronology.stations, entries); !intervals.empty()) {
    chronology.period = period_curve(intervals);
  } else if (const double period = period_from_interphases(interphases, nuclei.mitosis_min);
             period > 0) {
    chronology.period = PeriodCurve({0}, {period});
  }
  return chronology;
}

}  // namespace wavefount
