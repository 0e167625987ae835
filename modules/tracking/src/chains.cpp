#include "chains.h"

#include <algorithm>

namespace wavefount::tracking {

std::vector<Chain> chains_of(const FilmDetections& film, const std::vector<Segment>& segments,
                             const Evidence& evidence, const Lineage& lineage) {
  std::vector<Chain> chains;
  for (int i = 0; i < static_cast<int>(segments.size()); ++i) {
    if (lineage.previous[i] >= 0) continue;
    Chain chain;
    for (int at = i; at >= 0; at = lineage.next[at]) chain.segments.push_back(at);
    const bool proven = std::any_of(chain.segments.begin(), chain.segments.end(),
                                    [&](int segment) { return !evidence.weak[segment]; }) ||
                        stands_alone(film, evidence, segments, i);
    if (proven) chains.push_back(std::move(chain));
  }
  return chains;
}

std::vector<int> detections_of(const std::vector<Segment>& segments, const Chain& chain) {
  std::vector<int> all;
  for (const int segment : chain.segments) {
    const auto& own = segments[segment].detections;
    all.insert(all.end(), own.begin(), own.end());
  }
  return all;
}

}  // namespace wavefount::tracking
