#pragma once

#include <vector>

#include "mitosis.h"

namespace wavefount::tracking {

/// One nucleus: segments by time, joined over mitoses and runs of missed detections.
struct Chain {
  std::vector<int> segments;
};

/// The chains of a lineage in order of their first segment, without those that are nothing but weak
/// segments which prove nothing.
std::vector<Chain> chains_of(const FilmDetections& film, const std::vector<Segment>& segments,
                             const Evidence& evidence, const Lineage& lineage);

/// All detections of a chain by time.
std::vector<int> detections_of(const std::vector<Segment>& segments, const Chain& chain);

/// By chain: static debris, which neither fills nor empties while other nuclei cycle, or, where
/// nothing cycles for longer than a cycle takes, does not change at all. Nothing is debris in a
/// film too short to tell.
std::vector<bool> find_debris(const FilmDetections& film, const std::vector<Segment>& segments,
                              const Lineage& lineage, const std::vector<Chain>& chains);

}  // namespace wavefount::tracking
