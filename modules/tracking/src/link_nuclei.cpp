#include "wavefount/tracking/link_nuclei.h"

#include <algorithm>
#include <cmath>
#include <numeric>
#include <tuple>

#include "chains.h"
#include "events.h"
#include "traces.h"
#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

using namespace tracking;

struct Linked {
  FilmDetections film;
  Flow flow;
  Motion motion;
  std::vector<Segment> segments;
  Evidence evidence;
  Lineage lineage;
  std::vector<Chain> chains;
};

/// First pass: from frame to frame, then over missed detections.
void link_within_interphase(Linked& linked, LinkReport& report) {
  const auto look = first_look(linked.film);
  report.unreported_jumps = look.unreported_jumps;
  const Flow coarse(linked.film, look.links, look.common);
  linked.motion = estimate_motion(linked.film, look.links, coarse);
  const auto links = link_steps(linked.film, linked.motion, coarse);
  linked.flow = Flow(linked.film, links, look.common);
  const auto segments = segments_of(linked.film, links);
  linked.motion = refine_motion(linked.film, segments, linked.flow, linked.motion);
  linked.segments = close_missed(linked.film, linked.motion, linked.flow, segments);
  report.motion_um = std::sqrt(linked.motion.variance(linked.film.interval_min));
}

/// Second pass: over mitosis.
void link_over_mitosis(Linked& linked, const LinkSettings& settings, LinkReport& report) {
  linked.evidence = weigh_segments(linked.film, linked.motion, linked.segments);
  linked.lineage = link_mitoses(linked.film, linked.motion, linked.flow, linked.segments,
                                linked.evidence, settings);
  linked.chains = chains_of(linked.film, linked.segments, linked.evidence, linked.lineage);
  report.displacement_um = linked.lineage.model.displacement_um;
}

void drop_debris(Linked& linked, LinkReport& report) {
  const auto debris = find_debris(linked.film, linked.segments, linked.lineage, linked.chains);
  std::vector<Chain> kept;
  for (std::size_t i = 0; i < debris.size(); ++i)
    if (!debris[i]) kept.push_back(std::move(linked.chains[i]));
  report.debris = static_cast<int>(linked.chains.size() - kept.size());
  linked.chains = std::move(kept);
}

Point median_place(const std::vector<TracePoint>& points) {
  std::vector<double> x, y;
  for (const auto& point : points)
    if (point.found) {
      x.push_back(point.x_um);
      y.push_back(point.y_um);
    }
  return {median(std::move(x)), median(std::move(y))};
}

/// Positions of `nuclei` from left to right along the tube.
std::vector<int> order_along(const std::vector<Nucleus>& nuclei, const Tube& tube) {
  using Key = std::tuple<double, double, int>;
  std::vector<Key> keys;
  for (const auto& nucleus : nuclei) {
    const Point place = median_place(nucleus.points);
    const bool axis = tube.axis_um.size() > 1;
    const auto along = tube.place(place);
    keys.emplace_back(axis ? along.along_um : place.x, axis ? along.across_um : place.y,
                      nucleus.points.front().frame);
  }
  std::vector<int> order(nuclei.size());
  std::iota(order.begin(), order.end(), 0);
  std::stable_sort(order.begin(), order.end(), [&](int a, int b) { return keys[a] < keys[b]; });
  return order;
}

std::string kinship_note(const KinshipEvent& event, int parent_id) {
  const auto other = std::to_string(parent_id);
  const auto when = " at " + rounded_text(event.time_min) + " min";
  if (event.kinship == Kinship::fusion) return "fused with nucleus " + other + when;
  if (event.kinship == Kinship::fragment) return "broke away from nucleus " + other + when;
  return "daughter of nucleus " + other + when;
}

void note_doubts(const Linked& linked, const Chain& chain, Nucleus& nucleus) {
  for (const int segment : chain.segments)
    if (linked.lineage.doubtful[segment])
      nucleus.notes.push_back("identity uncertain at re-formation at " +
                              rounded_text(start_min(linked.film, linked.segments[segment])) +
                              " min");
}

/// Nuclei by chain, without ids yet.
std::vector<Nucleus> traced(const Linked& linked, const Observations& observations,
                            const Drift& drift) {
  const auto blurred = out_of_focus(linked.film, observations);
  std::vector<Nucleus> nuclei;
  for (const auto& chain : linked.chains) {
    auto& nucleus = nuclei.emplace_back();
    nucleus.points = trace_of(linked.film, observations, drift, linked.flow, blurred,
                              detections_of(linked.segments, chain));
    note_doubts(linked, chain, nucleus);
  }
  return nuclei;
}

void add_kinship(const Linked& linked, std::vector<Nucleus>& nuclei) {
  for (const auto& event :
       find_kinship(linked.film, linked.segments, linked.lineage, linked.chains)) {
    auto& nucleus = nuclei[event.chain];
    const int parent = nuclei[event.parent].id;
    nucleus.parents.push_back(parent);
    if (nucleus.kinship == Kinship::none) nucleus.kinship = event.kinship;
    nucleus.notes.push_back(kinship_note(event, parent));
  }
}

void count_mitoses(const Linked& linked, LinkedNuclei& result) {
  std::vector<double> minutes;
  for (const auto& chain : linked.chains)
    for (const int segment : chain.segments) {
      if (linked.lineage.mitosis_min[segment] <= 0) continue;
      minutes.push_back(linked.lineage.mitosis_min[segment]);
      if (linked.lineage.doubtful[segment]) ++result.report.ambiguous_mitoses;
    }
  result.report.mitoses = static_cast<int>(minutes.size());
  result.nuclei.mitosis_min = median(std::move(minutes));
}

int spurious_of(const Linked& linked) {
  std::size_t used = 0;
  for (const auto& chain : linked.chains) used += detections_of(linked.segments, chain).size();
  return static_cast<int>(linked.film.all.size() - used);
}

}  // namespace

LinkedNuclei link_nuclei(const FilmDescription& film, const Observations& observations,
                         const Tube& tube, const Drift& drift, const LinkSettings& settings) {
  LinkedNuclei result;
  Linked linked;
  linked.film = gather_detections(film, observations, tube, drift);
  if (linked.film.all.empty()) return result;
  link_within_interphase(linked, result.report);
  link_over_mitosis(linked, settings, result.report);
  result.report.spurious_sightings = spurious_of(linked);
  if (settings.drop_debris) drop_debris(linked, result.report);
  count_mitoses(linked, result);
  auto nuclei = traced(linked, observations, drift);
  const auto order = order_along(nuclei, tube);
  for (std::size_t i = 0; i < order.size(); ++i) nuclei[order[i]].id = static_cast<int>(i) + 1;
  add_kinship(linked, nuclei);
  for (const int at : order) result.nuclei.nuclei.push_back(std::move(nuclei[at]));
  return result;
}

}  // namespace wavefount
