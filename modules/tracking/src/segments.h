#pragma once

#include <vector>

#include "detections.h"
#include "flow.h"
#include "motion.h"

namespace wavefount::tracking {

/// One thing seen without a break that could be a mitosis: detections by rising step.
struct Segment {
  std::vector<int> detections;

  int length() const { return static_cast<int>(detections.size()); }
};

int first_step(const FilmDetections& film, const Segment& segment);
int last_step(const FilmDetections& film, const Segment& segment);
double start_min(const FilmDetections& film, const Segment& segment);
double end_min(const FilmDetections& film, const Segment& segment);
/// Place where it starts or ends: median over a few detections, since the youngest outlines and
/// those of a releasing nucleus wobble.
Point start_place(const FilmDetections& film, const Segment& segment);
Point end_place(const FilmDetections& film, const Segment& segment);
/// Brightest of its last few detections: the very last may show a nucleus half emptied.
double end_brightness(const FilmDetections& film, const Segment& segment);
double start_brightness(const FilmDetections& film, const Segment& segment);
/// The longest that it can have lasted: from the step before its first to the step after its last.
double longest_min(const FilmDetections& film, const Segment& segment);

/// Whether the film starts, or ends, with it; one step may have been missed there.
bool at_film_start(const FilmDetections& film, const Segment& segment);
bool at_film_end(const FilmDetections& film, const Segment& segment);

/// Segments joined by links; every detection is in one, in order of their first detection.
std::vector<Segment> segments_of(const FilmDetections& film, const std::vector<Link>& links);
std::vector<Link> links_of(const std::vector<Segment>& segments);

/// Second look: every step linked with the next by linear assignment, places predicted by the flow,
/// displacement and changes of area and brightness in units of the film's own.
std::vector<Link> link_steps(const FilmDetections& film, const Motion& motion, const Flow& flow);

/// Joins segments over a few missed detections: near the predicted place, and not dimmer than a
/// nucleus that has just been through mitosis would be.
std::vector<Segment> close_missed(const FilmDetections& film, const Motion& motion,
                                  const Flow& flow, const std::vector<Segment>& segments);

/// How much time adds to the spread of places, from displacements over growing lags along segments.
Motion refine_motion(const FilmDetections& film, const std::vector<Segment>& segments,
                     const Flow& flow, Motion motion);

}  // namespace wavefount::tracking
