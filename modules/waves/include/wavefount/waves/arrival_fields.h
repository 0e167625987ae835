#pragma once

#include <vector>

#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"
#include "wavefount/waves/chronology.h"
#include "wavefount/waves/field.h"
#include "wavefount/waves/fronts.h"

namespace wavefount {

/// What find-waves hands to find-origins beside the waves; by position in Waves::waves.
struct ArrivalFields {
  static constexpr const char* record_name = "arrival-fields";
  double spacing_um = 0;
  bool wide = false;  ///< wider than two spacings: fronts are curves, walls are sites
  double period_min = 0;
  std::vector<Arrivals> arrivals;        ///< by wave; arrivals in the order of Wave::entries
  std::vector<FieldFit> fits;            ///< by wave
  std::vector<std::vector<Link>> links;  ///< by wave; positions in Wave::entries
  std::vector<double> steepness, contradicting_share;  ///< by wave: NumberDoubt
};

/// Whether fronts run in two dimensions.
bool is_wide(const Tube& tube, double spacing_um, const WaveEntries& entries);

/// The arrivals of a wave; `least_se_min` stands for what timing leaves out of its standard errors.
Arrivals arrivals_of(const Wave& wave, const WaveEntries& entries, const Tube& tube,
                     double spacing_um, bool wide, double least_se_min);

/// By arrival: no other nucleus of the wave lies nearer to the point of an open edge that is
/// nearest to this one, so nobody knows whether it was first.
std::vector<char> at_view_edge(const Arrivals& arrivals, const Tube& tube, bool wide);

/// From a mean field: how prominent a minimum has to be to be an origin rather than the
/// field's own uncertainty. A source that leads its surroundings by a spacing of nuclei stands
/// out by a spacing times the slowness.
double least_prominence_min(const Arrivals& arrivals, const FieldFit& fit,
                            const std::vector<Link>& links, double spacing_um);

/// Minima of the posterior mean field as sources, and the arrivals' basins; for fewer than five
/// arrivals the earliest one.
struct MeanSources {
  std::vector<Source> sources;
  std::vector<int> basin;
};
MeanSources mean_sources(const Arrivals& arrivals, const FieldFit& fit,
                         const std::vector<Link>& links, const Tube& tube, bool wide,
                         double spacing_um);

/// The source at a place of an arrival: from outside when at an open edge.
Source source_at(Point place_um, int origin, bool at_open_edge, const Tube& tube);

}  // namespace wavefount
