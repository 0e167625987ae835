#include <cmath>
#include <map>

#include "pair_up.h"
#include "score_parts.h"

namespace wavefount {
namespace {

// A place is right when it lies inside the nucleus; the least reach allows for very young ones.
constexpr double least_reach_um = 8;

struct LifeKey {
  int nucleus = 0, cycle = 0;
  auto operator<=>(const LifeKey&) const = default;
};

/// What each true nucleus was taken for, frame by frame.
using Seen = std::map<LifeKey, std::map<int, std::optional<NucleusKey>>>;

void match_frame(const TruthFilm& truth, const std::vector<TruthPoint>& points,
                 const std::vector<ResultPoint>& found, int frame, FilmScore& score, Seen& seen) {
  const auto partners = pair_up(found.size(), points.size(), [&](std::size_t i, std::size_t j) {
    const double distance = truth.pixel_um * std::hypot(found[i].place_px.x - points[j].place_px.x,
                                                        found[i].place_px.y - points[j].place_px.y);
    const bool near = distance <= std::max(points[j].radius_um, least_reach_um);
    return near ? std::optional(distance) : std::nullopt;
  });
  std::vector<std::optional<NucleusKey>> taken_for(points.size());
  for (std::size_t i = 0; i < found.size(); ++i) {
    if (!partners[i])
      ++score.nuclei_invented;
    else
      taken_for[*partners[i]] = found[i].key;
  }
  for (std::size_t j = 0; j < points.size(); ++j) {
    if (points[j].faint) continue;
    ++(taken_for[j] ? score.nuclei_found : score.nuclei_missed);
    seen[{points[j].nucleus, points[j].cycle}][frame] = taken_for[j];
  }
}

void score_links(const Seen& seen, FilmScore& score) {
  for (const auto& [life, frames] : seen)
    for (auto at = frames.begin(); at != frames.end(); ++at) {
      const auto next = std::next(at);
      if (next == frames.end() || next->first != at->first + 1) continue;
      score.links.count(at->second && next->second && *at->second == *next->second);
    }
}

/// The identity a nucleus had in most frames of an interphase; empty when it was hardly seen.
std::optional<NucleusKey> identity(const std::map<int, std::optional<NucleusKey>>& frames) {
  constexpr int least_frames = 3;
  std::map<NucleusKey, int> votes;
  for (const auto& [frame, key] : frames)
    if (key) ++votes[*key];
  std::optional<NucleusKey> best;
  int most = least_frames - 1;
  for (const auto& [key, count] : votes) {
    if (count <= most) continue;
    most = count;
    best = key;
  }
  return best;
}

void score_identities(const TruthFilm& truth, const Seen& seen, FilmScore& score) {
  for (const auto& entry : truth.entries) {
    const auto before = seen.find({entry.nucleus, entry.cycle});
    const auto after = seen.find({entry.nucleus, entry.cycle + 1});
    if (!entry.counts || before == seen.end() || after == seen.end()) continue;
    const auto first = identity(before->second);
    const auto second = identity(after->second);
    if (first && second) score.identities.count(*first == *second);
  }
}

}  // namespace

void score_nuclei(const TruthFilm& truth, const ResultFilm& result, FilmScore& score) {
  Seen seen;
  const std::vector<ResultPoint> none;
  for (std::size_t frame = 0; frame < truth.frames.size(); ++frame) {
    const auto found = result.frames.find(static_cast<int>(frame));
    match_frame(truth, truth.frames[frame], found == result.frames.end() ? none : found->second,
                static_cast<int>(frame), score, seen);
  }
  score_links(seen, score);
  score_identities(truth, seen, score);
}

}  // namespace wavefount
