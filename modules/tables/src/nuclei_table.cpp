#include <map>

#include "fields.h"
#include "periods.h"
#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"
#include "wavefount/core/tube.h"

namespace wavefount {
namespace {

/// What is summed up over a nucleus' interphases.
struct Life {
  int interphases = 0;
  std::vector<Duration> periods;
  std::vector<double> import_rates_per_min;
};

struct Row {
  const std::string& acquisition;
  const Nucleus& nucleus;
  const Life& life;
  std::vector<double> seen_min;
  std::optional<Point> place_um;
  std::optional<TubePlace> in_tube;
  std::vector<double> brightness;
  std::optional<double> nearest_um, territory_um2;
};
using Fields = std::vector<Field<Row>>;

Cell parents(const Row& row) {
  if (row.nucleus.parents.size() == 1) return integer_cell(row.nucleus.parents.front());
  std::vector<std::string> texts;
  for (const int parent : row.nucleus.parents) texts.push_back(std::to_string(parent));
  return text_cell(joined(texts, ";"));
}

Cell median_cell(const std::vector<double>& values) {
  return values.empty() ? Cell() : number_cell(median(values));
}

Fields who_fields() {
  return {
      acquisition_field<Row>(),
      {integer_column("nucleus", "Nucleus", "Number of the nucleus in its acquisition, from 1."),
       [](const Row& row) { return integer_cell(row.nucleus.id); }},
      {integer_column("parent", "Parent",
                      "Nucleus that it came from by division or fragmentation; several, with "
                      "semicolons, where nuclei fused."),
       parents},
      {number_column("first_seen_min", "First seen (minutes)", 2,
                     "Time of the first frame in which it was found."),
       [](const Row& row) {
         return row.seen_min.empty() ? Cell() : number_cell(row.seen_min.front());
       }},
      {number_column("last_seen_min", "Last seen (minutes)", 2,
                     "Time of the last frame in which it was found."),
       [](const Row& row) {
         return row.seen_min.empty() ? Cell() : number_cell(row.seen_min.back());
       }},
  };
}

Cell from_place(const std::optional<Point>& place, double Point::*coordinate) {
  return place ? number_cell((*place).*coordinate) : Cell();
}

Cell from_tube(const Row& row, double TubePlace::*distance) {
  return row.in_tube ? number_cell((*row.in_tube).*distance) : Cell();
}

Fields place_fields() {
  return {
      {number_column("x_um", "x (micrometres)", 1,
                     "Median place over the frames in which it was found, in the image of the "
                     "first frame, drift removed."),
       [](const Row& row) { return from_place(row.place_um, &Point::x); }},
      {number_column("y_um", "y (micrometres)", 1, "Likewise, positive downwards."),
       [](const Row& row) { return from_place(row.place_um, &Point::y); }},
      {number_column("along_um", "Along the tube (micrometres)", 1,
                     "Distance along the axis from the tube's left end in view; from its top end "
                     "where the tube stands upright."),
       [](const Row& row) { return from_tube(row, &TubePlace::along_um); }},
      {number_column("across_um", "Across the tube (micrometres)", 1,
                     "Distance from the axis, positive downwards; to the right where the tube "
                     "stands upright."),
       [](const Row& row) { return from_tube(row, &TubePlace::across_um); }},
      {number_column("end_distance_um", "To the nearest end (micrometres)", 1,
                     "Distance along the axis to the nearest closed end; empty when no end is in "
                     "view."),
       [](const Row& row) { return from_tube(row, &TubePlace::end_distance_um); }},
      {number_column("wall_distance_um", "To the nearest wall (micrometres)", 1,
                     "Distance to the nearest wall in view; empty when none is."),
       [](const Row& row) { return from_tube(row, &TubePlace::wall_distance_um); }},
      {number_column("nearest_um", "To the nearest nucleus (micrometres)", 1,
                     "Distance to the nearest other nucleus."),
       [](const Row& row) { return number_cell(row.nearest_um); }},
      {number_column("territory_um2", "Territory (square micrometres)", 0,
                     "Area of the tube that lies nearer to this nucleus than to any other "
                     "(Voronoi cell inside the tube)."),
       [](const Row& row) { return number_cell(row.territory_um2); }},
  };
}

Fields life_fields() {
  return {
      {integer_column("cycles", "Interphases",
                      "Number of interphases seen of it, incomplete ones included."),
       [](const Row& row) { return integer_cell(row.life.interphases); }},
      {number_column("period_min", "Period (minutes)", 2,
                     "Mean time from one mitotic entry to the next of the same nucleus."),
       [](const Row& row) {
         const auto period = mean_period(row.life.periods);
         return period ? number_cell(period->min) : Cell();
       }},
      {number_column("period_se_min", "Period, standard error (minutes)", 3,
                     "Standard error of the mean period: from the timing of the entries or from "
                     "the scatter of three periods and more, whichever is larger."),
       [](const Row& row) {
         const auto period = mean_period(row.life.periods);
         return period ? number_cell(period->se_min) : Cell();
       }},
      {number_column("brightness", "Brightness (counts)", 1,
                     "Median over its undoubtful frames of the brightness above the local "
                     "cytoplasm, in camera counts."),
       [](const Row& row) { return median_cell(row.brightness); }},
      {number_column("import_rate_per_min", "Filling rate constant (per minute)", 4,
                     "Median over its interphases of the rate constant with which it fills."),
       [](const Row& row) { return median_cell(row.life.import_rates_per_min); }},
      {text_column("notes", "Notes", "What is particular about this nucleus."),
       [](const Row& row) { return text_cell(joined(row.nucleus.notes, "; ")); }},
  };
}

Fields fields() {
  Fields all = who_fields();
  for (auto& field : place_fields()) all.push_back(field);
  for (auto& field : life_fields()) all.push_back(field);
  return all;
}

std::map<int, Life> lives_of(const RecordStore& records) {
  const auto& interphases = records.get_or_empty<Interphases>();
  const auto periods = interphase_periods(interphases, records.get_or_empty<WaveEntries>());
  std::map<int, Life> lives;
  for (std::size_t i = 0; i < periods.size(); ++i) {
    const auto& interphase = interphases.interphases[i];
    auto& life = lives[interphase.nucleus];
    ++life.interphases;
    if (periods[i]) life.periods.push_back(*periods[i]);
    const bool whole = interphase.start == Start::seen && interphase.import;
    if (whole && interphase.import->rate_per_min)
      life.import_rates_per_min.push_back(*interphase.import->rate_per_min);
  }
  return lives;
}

void gather_points(Row& row, const Tube* tube) {
  std::vector<double> x, y;
  for (const auto& point : row.nucleus.points) {
    if (!point.found) continue;
    row.seen_min.push_back(point.time_min);
    x.push_back(point.x_um);
    y.push_back(point.y_um);
    if (!point.doubtful) row.brightness.push_back(point.brightness);
  }
  if (x.empty()) return;
  row.place_um = Point{median(x), median(y)};
  if (tube && tube->axis_um.size() >= 2) row.in_tube = tube->place(*row.place_um);
}

}  // namespace

TableSource nuclei_table(const AcquisitionView& view) {
  return source_of<Row>("nuclei", fields(), [&view](const auto& emit) {
    const auto lives = lives_of(view.records);
    const auto& territories = view.records.get_or_empty<Territories>();
    const auto& nuclei = view.records.get_or_empty<Nuclei>().nuclei;
    const Life none;
    for (std::size_t i = 0; i < nuclei.size(); ++i) {
      const auto life = lives.find(nuclei[i].id);
      Row row{view.name, nuclei[i], life == lives.end() ? none : life->second, {}, {}, {}, {},
              {},        {}};
      gather_points(row, view.records.peek<Tube>());
      if (i < territories.nearest_um.size()) row.nearest_um = territories.nearest_um[i];
      if (i < territories.territory_um2.size()) row.territory_um2 = territories.territory_um2[i];
      emit(row);
    }
  });
}

}  // namespace wavefount
