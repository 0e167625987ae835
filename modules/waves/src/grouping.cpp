#include "wavefount/waves/grouping.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <utility>

#include "wavefount/core/robust.h"

namespace wavefount {
namespace {

std::map<int, std::vector<int>> entries_by_cycle(const WaveEntries& entries) {
  std::map<int, std::vector<int>> by_cycle;
  for (int i = 0; i < static_cast<int>(entries.entries.size()); ++i) {
    if (entries.entries[i].cycle > 0) by_cycle[entries.entries[i].cycle].push_back(i);
  }
  return by_cycle;
}

void add_waves_of_cycle(int cycle, const std::vector<int>& members, const std::vector<Link>& links,
                        WaveEntries& entries, Waves& waves) {
  const auto part = connected_parts(members.size(), links);
  std::map<int, Wave> by_part;
  for (std::size_t i = 0; i < members.size(); ++i) by_part[part[i]].entries.push_back(members[i]);
  for (auto& [number, wave] : by_part) {
    if (wave.entries.size() < 2) continue;
    wave.cycle = cycle;
    const auto earlier = [&](int a, int b) {
      return entries.entries[a].time_min < entries.entries[b].time_min;
    };
    std::stable_sort(wave.entries.begin(), wave.entries.end(), earlier);
    wave.start_min = entries.entries[wave.entries.front()].time_min;
    wave.end_min = entries.entries[wave.entries.back()].time_min;
    waves.waves.push_back(std::move(wave));
  }
  for (const auto& link : links) {
    if (link.bridge) continue;
    entries.entries[members[link.a]].neighbours.push_back(members[link.b]);
    entries.entries[members[link.b]].neighbours.push_back(members[link.a]);
  }
}

/// For every entry the one before it at the same station, -1 for the first.
std::vector<int> entries_before(const WaveEntries& entries, const Chronology& chronology) {
  std::vector<int> before(entries.entries.size(), -1);
  for (const auto& station : chronology.stations) {
    int last = -1;
    for (const int entry : station.entries) {
      if (entries.entries[entry].cycle == 0) continue;
      before[entry] = last;
      last = entry;
    }
  }
  return before;
}

}  // namespace

std::vector<Link> wave_links(const std::vector<int>& members, const WaveEntries& entries,
                             const Tube& tube, const Chronology& chronology,
                             const NeighbourRules& rules) {
  std::vector<Point> places;
  for (const int member : members)
    places.push_back({entries.entries[member].x_um, entries.entries[member].y_um});
  auto links = neighbour_graph(places, tube, chronology.spacing_um, rules).links;
  std::erase_if(links, [&](const Link& link) {
    const double from = entries.entries[members[link.a]].time_min;
    const double to = entries.entries[members[link.b]].time_min;
    const double spacings = std::max(1.0, link.length_um / chronology.spacing_um);
    return std::abs(to - from) > spacings * chronology.period.at((from + to) / 2) / 2;
  });
  return links;
}

Waves group_waves(WaveEntries& entries, const Tube& tube, const Chronology& chronology,
                  const NeighbourRules& rules) {
  Waves waves;
  for (auto& entry : entries.entries) {
    entry.wave = 0;
    entry.neighbours.clear();
  }
  for (const auto& [cycle, members] : entries_by_cycle(entries))
    add_waves_of_cycle(cycle, members, wave_links(members, entries, tube, chronology, rules),
                       entries, waves);
  std::stable_sort(waves.waves.begin(), waves.waves.end(), [](const Wave& left, const Wave& right) {
    return left.start_min < right.start_min;
  });
  for (int i = 0; i < static_cast<int>(waves.waves.size()); ++i) {
    waves.waves[i].number = i + 1;
    for (const int entry : waves.waves[i].entries) entries.entries[entry].wave = i + 1;
  }
  for (auto& entry : entries.entries) std::sort(entry.neighbours.begin(), entry.neighbours.end());
  return waves;
}

void measure_periods(Waves& waves, const WaveEntries& entries, const Chronology& chronology) {
  const auto before = entries_before(entries, chronology);
  for (auto& wave : waves.waves) {
    std::vector<double> periods;
    for (const int entry : wave.entries) {
      if (before[entry] < 0) continue;
      const auto& earlier = entries.entries[before[entry]];
      if (earlier.cycle == wave.cycle - 1)
        periods.push_back(entries.entries[entry].time_min - earlier.time_min);
    }
    if (!periods.empty()) wave.period_min = median(std::move(periods));
  }
}

NumberDoubt number_doubt(const Wave& wave, const WaveEntries& entries,
                         const Chronology& chronology) {
  NumberDoubt doubt;
  std::vector<double> steps;
  for (const int entry : wave.entries) {
    const auto& own = entries.entries[entry];
    for (const int near : own.neighbours)
      steps.push_back(std::abs(entries.entries[near].time_min - own.time_min) /
                      chronology.period.at(own.time_min));
  }
  if (!steps.empty()) doubt.steepness = 2 * median(std::move(steps));
  int links = 0, against = 0;
  for (const auto& link : chronology.graph.links) {
    if (link.bridge) continue;
    for (const int a : chronology.stations[link.a].entries) {
      if (entries.entries[a].wave != wave.number) continue;
      const double time = entries.entries[a].time_min;
      for (const int b : chronology.stations[link.b].entries) {
        const auto& other = entries.entries[b];
        if (other.cycle == 0 || std::abs(other.time_min - time) > 0.4 * chronology.period.at(time))
          continue;
        ++links;
        against += other.cycle != wave.cycle;
      }
    }
  }
  if (links > 0) doubt.contradicting_share = static_cast<double>(against) / links;
  return doubt;
}

}  // namespace wavefount
