#include <algorithm>
#include <cmath>
#include <map>
#include <set>

#include "lay_nuclei.h"
#include "wavefount/synthetic/truth.h"

namespace wavefount {
namespace {

constexpr int few_nuclei = 5;  // contract: fewer is `too-few`

struct Member {
  const SceneNucleus* nucleus = nullptr;
  const SceneLife* life = nullptr;
  bool counts = false;
  bool in_view = false;
  int source = -1;
};

/// Whether a nucleus' home lies in the image; the ends of the axis are where an open tube leaves
/// it.
bool home_in_view(const Scene& scene, const SceneNucleus& nucleus) {
  const auto& tube = scene.tubes[static_cast<std::size_t>(nucleus.tube)];
  return nucleus.along_um > 0 && nucleus.along_um < tube.length_um;
}

std::map<int, std::vector<Member>> members_by_cycle(const Scene& scene, int tube) {
  std::map<int, std::vector<Member>> cycles;
  for (const auto& nucleus : scene.nuclei) {
    if (nucleus.tube != tube) continue;
    for (const auto& life : nucleus.lives) {
      if (life.dies) continue;
      Member member{&nucleus, &life, entry_counts(scene, life), home_in_view(scene, nucleus), -1};
      arrival_min(scene, tube, nucleus.along_um, nucleus.across_um, life.cycle, &member.source);
      cycles[life.cycle].push_back(member);
    }
  }
  return cycles;
}

Site site_of(const Scene& scene, const SceneSource& source) {
  if (!source.in_view) return Site::view_edge;
  const auto& tube = scene.tubes[static_cast<std::size_t>(source.tube)];
  const double spacing = median_spacing_um(scene, source.tube);
  const bool left = tube.left_end == Boundary::closed && source.along_um < spacing;
  const bool right =
      tube.right_end == Boundary::closed && tube.length_um - source.along_um < spacing;
  if (left || right) return Site::end;
  const double to_wall = tube.width_um / 2 - std::abs(source.across_um);
  if (tube.width_um > 2 * spacing && to_wall < spacing / 2) return Site::wall;
  return Site::interior;
}

double first_min(const SceneSource& source, int cycle) {
  return source.first_min + (cycle - 1) * source.period_min;
}

/// How much later than its own start the front of a source meets that of an earlier one.
std::optional<double> prominence(const Scene& scene, const TruthWave& wave, int index) {
  const auto& own = scene.sources[static_cast<std::size_t>(index)];
  std::optional<double> least;
  for (const auto& origin : wave.origins) {
    if (origin.source == index) continue;
    const auto& other = scene.sources[static_cast<std::size_t>(origin.source)];
    if (first_min(other, wave.cycle) >= first_min(own, wave.cycle)) continue;
    const double apart = std::hypot(own.along_um - other.along_um, own.across_um - other.across_um);
    const double travel = apart / wave.speed_um_per_min.value_or(1e9);
    const double later = (travel - (first_min(own, wave.cycle) - first_min(other, wave.cycle))) / 2;
    least = std::min(least.value_or(later), later);
  }
  return least;
}

TruthOrigin origin_of(const Scene& scene, int source, const std::vector<Member>& members,
                      int cycle) {
  TruthOrigin origin;
  origin.source = source;
  const auto& from = scene.sources[static_cast<std::size_t>(source)];
  origin.first_min = first_min(from, cycle);
  origin.site = site_of(scene, from);
  double nearest = 1e9;
  const Member* leader = nullptr;
  for (const auto& member : members) {
    if (!member.in_view || member.source != source) continue;
    ++origin.basin_nuclei;
    const double distance = std::hypot(member.nucleus->along_um - from.along_um,
                                       member.nucleus->across_um - from.across_um);
    if (distance >= nearest) continue;
    nearest = distance;
    leader = &member;
  }
  if (leader) origin.leader = leader->nucleus->number;
  origin.watched = leader && leader->counts && from.in_view;
  return origin;
}

bool comes_from_outside(const Scene& scene, const TruthWave& wave) {
  return !wave.origins.empty() &&
         !scene.sources[static_cast<std::size_t>(wave.origins.front().source)].in_view;
}

void list_origins(const Scene& scene, const std::vector<Member>& members, TruthWave& wave) {
  constexpr int least_basin = 3;
  std::set<int> reached;
  for (const auto& member : members)
    if (member.in_view && member.source >= 0) reached.insert(member.source);
  for (const int source : reached)
    wave.origins.push_back(origin_of(scene, source, members, wave.cycle));
  std::sort(wave.origins.begin(), wave.origins.end(), [](const auto& a, const auto& b) {
    return std::pair(a.first_min, a.source) < std::pair(b.first_min, b.source);
  });
  const double interval = scene.frames() > 1 ? scene.times_min.back() / (scene.frames() - 1) : 0;
  const double resolvable = std::max(3 * scene.waves.jitter_min, 2 * interval);
  for (auto& origin : wave.origins) {
    origin.prominence_min = prominence(scene, wave, origin.source);
    origin.judged = origin.watched && wave.travelling && !comes_from_outside(scene, wave) &&
                    origin.basin_nuclei >= least_basin &&
                    origin.prominence_min.value_or(resolvable) >= resolvable;
  }
}

/// `entering`: nuclei in view that enter while the film runs, whether or not that entry counts.
std::optional<Answer> answer_of(const Scene& scene, const TruthWave& wave, int entering) {
  if (entering < few_nuclei) return Answer::too_few;
  if (static_cast<int>(wave.nuclei.size()) < few_nuclei) return std::nullopt;
  if (scene.waves.together) return Answer::synchronous;
  if (wave.origins.empty() || !wave.travelling) return std::nullopt;
  if (comes_from_outside(scene, wave)) return Answer::enters_view;
  const auto judged = std::count_if(wave.origins.begin(), wave.origins.end(),
                                    [](const TruthOrigin& origin) { return origin.judged; });
  if (judged < static_cast<long>(wave.origins.size())) return std::nullopt;
  return judged == 1 ? Answer::single : Answer::coexisting;
}

/// As the contract has it: confirmed when at least half of the nuclei re-form, terminal when they
/// are watched for twice the time in mitosis and do not.
Fate fate_of(const Scene& scene, const std::vector<Member>& members) {
  const double end = scene.times_min.back();
  int reformed = 0;
  int all = 0;
  double last = 0;
  for (const auto& member : members) {
    if (!member.counts) continue;
    ++all;
    last = std::max(last, member.life->entry_min);
    const auto* next = member.life + 1;
    if (member.life != &member.nucleus->lives.back() && next->formed_min < end) ++reformed;
  }
  if (2 * reformed >= all) return Fate::confirmed;
  return last + 2 * scene.waves.mitosis_min < end ? Fate::terminal : Fate::unconfirmed;
}

TruthWave wave_of(const Scene& scene, int tube, int cycle, const std::vector<Member>& members) {
  TruthWave wave;
  wave.tube = tube;
  wave.cycle = cycle;
  wave.complete = true;
  double first = 1e9;
  double last = -1e9;
  int entering = 0;
  for (const auto& member : members) {
    const double entry = member.life->entry_min;
    if (member.in_view && entry > 0 && entry < scene.times_min.back()) ++entering;
    if (member.in_view && !member.counts) wave.complete = false;
    if (!member.counts) continue;
    wave.nuclei.push_back(member.nucleus->number);
    first = std::min(first, entry);
    last = std::max(last, entry);
  }
  if (!scene.waves.together)
    wave.speed_um_per_min =
        scene.waves.speed_um_per_min / (1 + scene.waves.speed_change * (cycle - 1));
  constexpr double clear_spread = 6;  // spread over jitter from which an order shows
  wave.fate = fate_of(scene, members);
  wave.travelling = !scene.waves.together && wave.fate != Fate::terminal &&
                    static_cast<int>(wave.nuclei.size()) >= few_nuclei &&
                    last - first > clear_spread * scene.waves.jitter_min;
  list_origins(scene, members, wave);
  wave.answer = answer_of(scene, wave, entering);
  return wave;
}

}  // namespace

std::vector<TruthWave> truth_waves(const Scene& scene) {
  std::vector<TruthWave> waves;
  for (std::size_t t = 0; t < scene.tubes.size(); ++t) {
    int number = 0;
    for (const auto& [cycle, members] : members_by_cycle(scene, static_cast<int>(t))) {
      auto wave = wave_of(scene, static_cast<int>(t), cycle, members);
      if (wave.nuclei.empty()) continue;
      wave.number = ++number;
      waves.push_back(std::move(wave));
    }
  }
  return waves;
}

}  // namespace wavefount
