#include "fields.h"
#include "wavefount/core/wave.h"

namespace wavefount {
namespace {

struct Row {
  const std::string& acquisition;
  const Wave& wave;
  const Origin& origin;
};
using Fields = std::vector<Field<Row>>;

template <class Value>
std::function<Cell(const Row&)> of_origin(Value Origin::*value) {
  return [value](const Row& row) { return number_cell(row.origin.*value); };
}

Fields who_fields() {
  return {
      acquisition_field<Row>(),
      {integer_column("wave", "Wave", "Number of the wave in its acquisition."),
       [](const Row& row) { return integer_cell(row.wave.number); }},
      {integer_column("origin", "Origin", "Number of the candidate, the most probable first."),
       [](const Row& row) { return integer_cell(row.origin.number); }},
      {text_column("claimed", "Claimed", "yes: named as an origin of the wave; no: a candidate."),
       [](const Row& row) { return yes_no_cell(row.origin.claimed); }},
      {number_column("probability", "Probability", 3, "Probability that the wave began there."),
       of_origin(&Origin::probability)},
      {integer_column("nucleus", "Leading nucleus", "Number of the nucleus that leads there."),
       [](const Row& row) {
         return row.origin.nucleus > 0 ? integer_cell(row.origin.nucleus) : Cell();
       }},
  };
}

Fields place_fields() {
  return {
      {number_column("x_um", "x (micrometres)", 1,
                     "Place in the image of the first frame, drift removed."),
       of_origin(&Origin::x_um)},
      {number_column("y_um", "y (micrometres)", 1, "Likewise, positive downwards."),
       of_origin(&Origin::y_um)},
      {number_column("along_um", "Along the tube (micrometres)", 1,
                     "Distance along the axis from the tube's left (top) end in view."),
       of_origin(&Origin::along_um)},
      {number_column("across_um", "Across the tube (micrometres)", 1,
                     "Distance from the axis, positive downwards (to the right if upright)."),
       of_origin(&Origin::across_um)},
      {number_column("position_se_um", "Place, standard error (micrometres)", 1,
                     "Standard error of the place along the tube."),
       of_origin(&Origin::position_se_um)},
  };
}

Fields time_fields() {
  return {
      {number_column("entry_min", "Mitotic entry (minutes)", 3,
                     "Time of mitotic entry at the origin."),
       of_origin(&Origin::entry_min)},
      {number_column("prominence_min", "Prominence (minutes)", 3,
                     "How much later the entries are where its basin meets an earlier one; empty "
                     "for the earliest."),
       of_origin(&Origin::prominence_min)},
      {number_column("prominence_se_min", "Prominence, standard error (minutes)", 3,
                     "Standard error of the prominence."),
       of_origin(&Origin::prominence_se_min)},
      {integer_column("basin_nuclei", "Nuclei in its basin",
                      "Number of nuclei that the wave reached from there."),
       [](const Row& row) { return integer_cell(row.origin.basin_nuclei); }},
  };
}

Fields site_fields() {
  return {
      {text_column("site", "Site",
                   "end: within one nuclear spacing of a closed end; wall: within half a spacing "
                   "of a wall in a wide tube; view-edge: at an open edge; else interior."),
       [](const Row& row) { return text_cell(name_of(row.origin.site)); }},
      {number_column("chance_of_site", "Chance of the site by nuclei", 3,
                     "Share of the wave's nuclei that lie at such a site."),
       of_origin(&Origin::chance_of_site)},
      {number_column("chance_of_site_smooth", "Chance of the site by geometry", 3,
                     "Share of random smooth fields of entry times whose earliest point falls at "
                     "such a site."),
       of_origin(&Origin::chance_of_site_smooth)},
  };
}

Fields leader_fields() {
  return {
      {number_column("brightness_percentile", "Brightness of the leader (percentile)", 0,
                     "Percentile of the leading nucleus among the wave's nuclei in brightness at "
                     "a common age."),
       of_origin(&Origin::brightness_percentile)},
      {number_column("import_percentile", "Import of the leader (percentile)", 0,
                     "Percentile of the leading nucleus among the wave's nuclei in import."),
       of_origin(&Origin::import_percentile)},
      {number_column("territory_percentile", "Territory of the leader (percentile)", 0,
                     "Percentile of the leading nucleus among the wave's nuclei in territory."),
       of_origin(&Origin::territory_percentile)},
      {number_column("period_ratio", "Period over that of its basin", 3,
                     "Period at the origin over the median in its basin, from cycles that neither "
                     "start nor end at this wave."),
       of_origin(&Origin::period_ratio)},
      {number_column("period_ratio_slowest", "Period over that of the slowest", 3,
                     "Period at the origin over that of the slowest tenth of nuclei."),
       of_origin(&Origin::period_ratio_slowest)},
  };
}

Fields fields() {
  Fields all = who_fields();
  for (const auto& part : {place_fields(), time_fields(), site_fields(), leader_fields()})
    all.insert(all.end(), part.begin(), part.end());
  return all;
}

}  // namespace

TableSource origins_table(const AcquisitionView& view) {
  return source_of<Row>("origins", fields(), [&view](const auto& row) {
    for (const auto& wave : view.records.get_or_empty<Waves>().waves)
      for (const auto& origin : wave.origins) row({view.name, wave, origin});
  });
}

}  // namespace wavefount
