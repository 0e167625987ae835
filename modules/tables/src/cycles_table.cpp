#include "fields.h"
#include "periods.h"
#include "wavefount/core/text.h"
#include "wavefount/core/tube.h"

namespace wavefount {
namespace {

struct Row {
  const std::string& acquisition;
  const Interphase& interphase;
  const WaveEntry* entry;  ///< nullptr: it did not enter, or no step has numbered the cycles
  std::optional<int> cycle;
  std::optional<Duration> period;
  std::optional<TubePlace> in_tube;
};
using Fields = std::vector<Field<Row>>;

std::string name_of(Start start) {
  return start == Start::seen ? "seen" : "already-present";
}

std::string name_of(Outcome outcome) {
  switch (outcome) {
    case Outcome::entered:
      return "entered";
    case Outcome::unfinished:
      return "unfinished";
    case Outcome::lost:
      return "lost";
  }
  return {};
}

template <class Value>
Cell of_entry(const Row& row, Value Entry::*value) {
  return row.interphase.entry ? number_cell((*row.interphase.entry).*value) : Cell();
}

/// Import is measured only where the filling was seen from its start.
template <class Value>
Cell of_import(const Row& row, Value ImportFit::*value) {
  const auto& fit = row.interphase.import;
  if (!fit || row.interphase.start == Start::already_present) return {};
  return number_cell((*fit).*value);
}

template <class Value>
Cell of_wave_entry(const Row& row, Value WaveEntry::*value) {
  return row.entry ? number_cell((*row.entry).*value) : Cell();
}

Fields who_fields() {
  return {
      acquisition_field<Row>(),
      {integer_column("nucleus", "Nucleus", "Number of the nucleus in its acquisition, from 1."),
       [](const Row& row) { return integer_cell(row.interphase.nucleus); }},
      {integer_column("cycle", "Cycle",
                      "Number of the cycle, the same for all nuclei of one mitotic wave, found by "
                      "comparing neighbours."),
       [](const Row& row) { return row.cycle ? integer_cell(*row.cycle) : Cell(); }},
      {integer_column("wave", "Wave", "Number of the wave that its mitotic entry belongs to."),
       [](const Row& row) {
         return row.entry && row.entry->wave > 0 ? integer_cell(row.entry->wave) : Cell();
       }},
      {text_column("start", "Start",
                   "seen: its formation was seen; already-present: it was there at the start of "
                   "the film."),
       [](const Row& row) { return text_cell(name_of(row.interphase.start)); }},
  };
}

Fields time_fields() {
  return {
      {number_column("formed_min", "Formed (minutes)", 2,
                     "Time at which the nucleus began to fill, from the fitted import."),
       [](const Row& row) {
         const bool seen = row.interphase.start == Start::seen;
         return seen ? number_cell(row.interphase.formed_min) : Cell();
       }},
      {number_column("entry_min", "Mitotic entry (minutes)", 3,
                     "Time of mitotic entry: onset of the rapid loss of the reporter."),
       [](const Row& row) { return of_entry(row, &Entry::time_min); }},
      {number_column("entry_se_min", "Mitotic entry, standard error (minutes)", 3,
                     "Standard error of the time of mitotic entry."),
       [](const Row& row) { return of_entry(row, &Entry::se_min); }},
      {number_column("half_loss_min", "Half lost (minutes)", 3,
                     "Time at which half of the brightness above cytoplasm is lost."),
       [](const Row& row) { return of_entry(row, &Entry::half_loss_min); }},
      {text_column("outcome", "Outcome",
                   "entered: into mitosis; unfinished: still in interphase when the film ends; "
                   "lost: vanished for another reason."),
       [](const Row& row) { return text_cell(name_of(row.interphase.outcome)); }},
  };
}

Fields place_fields() {
  return {
      {number_column("x_um", "x (micrometres)", 1,
                     "Place over its last frames, in the image of the first frame, drift "
                     "removed."),
       [](const Row& row) { return number_cell(row.interphase.place_um.x); }},
      {number_column("y_um", "y (micrometres)", 1, "Likewise, positive downwards."),
       [](const Row& row) { return number_cell(row.interphase.place_um.y); }},
      {number_column("along_um", "Along the tube (micrometres)", 1,
                     "Distance along the axis from the tube's left (top) end in view."),
       [](const Row& row) { return row.in_tube ? number_cell(row.in_tube->along_um) : Cell(); }},
      {number_column("across_um", "Across the tube (micrometres)", 1,
                     "Distance from the axis, positive downwards (to the right if upright)."),
       [](const Row& row) { return row.in_tube ? number_cell(row.in_tube->across_um) : Cell(); }},
  };
}

Fields import_fields() {
  return {
      {number_column("import_rate_per_min", "Filling rate constant (per minute)", 4,
                     "Rate constant k of the filling; empty where the interphase ended before the "
                     "curve bent."),
       [](const Row& row) { return of_import(row, &ImportFit::rate_per_min); }},
      {number_column("import_rate_se_per_min", "Filling rate constant, standard error (per minute)",
                     4, "Standard error of the filling rate constant."),
       [](const Row& row) { return of_import(row, &ImportFit::rate_se_per_min); }},
      {number_column("import_initial", "Initial import (counts per minute)", 2,
                     "Rise of brightness just after formation."),
       [](const Row& row) { return of_import(row, &ImportFit::initial); }},
      {number_column("import_initial_se", "Initial import, standard error (counts per minute)", 2,
                     "Standard error of the initial import."),
       [](const Row& row) { return of_import(row, &ImportFit::initial_se); }},
      {number_column("import_relative_per_min", "Relative import (per minute)", 4,
                     "Initial import over the offset-corrected brightness of the cytoplasm: the "
                     "measure to compare across films."),
       [](const Row& row) { return of_import(row, &ImportFit::relative_per_min); }},
      {number_column("import_total_per_min", "Total import (counts per minute)", 0,
                     "Initial rise of the integrated light of the whole nucleus."),
       [](const Row& row) { return of_import(row, &ImportFit::total_per_min); }},
      {number_column("plateau", "Plateau (counts)", 1,
                     "Brightness that the filling tends to; empty where the curve did not bend."),
       [](const Row& row) { return of_import(row, &ImportFit::plateau); }},
  };
}

Fields light_fields() {
  return {
      {number_column("brightness_mean", "Mean brightness (counts)", 1,
                     "Mean over the interphase of the brightness above the local cytoplasm."),
       [](const Row& row) { return number_cell(row.interphase.brightness_mean); }},
      {number_column("brightness_peak", "Peak brightness (counts)", 1,
                     "Highest brightness of the interphase above the local cytoplasm."),
       [](const Row& row) { return number_cell(row.interphase.brightness_peak); }},
      {number_column("brightness_at_age", "Brightness at common age (counts)", 1,
                     "Fitted brightness at one age common to the wave, 80 % of its shortest "
                     "interphase: the measure to compare nuclei."),
       [](const Row& row) { return of_wave_entry(row, &WaveEntry::brightness_at_age); }},
      {number_column("nc_ratio_peak", "Peak nucleus over cytoplasm", 3,
                     "Highest brightness of the nucleus over that of the cytoplasm, both above "
                     "the camera's dark offset; empty while the offset is not known."),
       [](const Row& row) { return number_cell(row.interphase.nc_ratio_peak); }},
      {number_column("radius_um", "Radius (micrometres)", 1,
                     "Radius of the circle of equal area at its largest."),
       [](const Row& row) { return number_cell(row.interphase.radius_um); }},
  };
}

Fields neighbour_fields() {
  return {
      {number_column("neighbour_delay_min", "Delay to neighbours (minutes)", 3,
                     "Its mitotic entry less that expected from its neighbours in the same wave; "
                     "negative when it enters before them."),
       [](const Row& row) { return of_wave_entry(row, &WaveEntry::neighbour_delay_min); }},
      {number_column("neighbour_delay_se_min", "Delay to neighbours, standard error (minutes)", 3,
                     "Standard error of the delay to its neighbours."),
       [](const Row& row) { return of_wave_entry(row, &WaveEntry::neighbour_delay_se_min); }},
      {text_column("timing", "Timing",
                   "leads, with-front, lags or out-of-step against its neighbours; alone: it has "
                   "none; none: it did not enter."),
       [](const Row& row) {
         return text_cell(wavefount::name_of(row.entry ? row.entry->timing : Timing::none));
       }},
      {number_column("lead_probability", "Probability that it leads", 3,
                     "Probability that it is the first of its surroundings to enter mitosis."),
       [](const Row& row) { return of_wave_entry(row, &WaveEntry::lead_probability); }},
  };
}

Fields extra_fields() {
  return {
      {number_column("period_min", "Period (minutes)", 2,
                     "Time since the mitotic entry before of the same nucleus."),
       [](const Row& row) { return row.period ? number_cell(row.period->min) : Cell(); }},
      {text_column("entry_signal", "Timed on", "Signal on which the mitotic entry was fitted."),
       [](const Row& row) {
         return row.interphase.entry ? text_cell(row.interphase.entry->signal) : Cell();
       }},
      {text_column("notes", "Notes", "What is particular about this interphase."),
       [](const Row& row) { return text_cell(joined(row.interphase.notes, "; ")); }},
  };
}

Fields fields() {
  Fields all = who_fields();
  for (const auto& part : {time_fields(), place_fields(), import_fields(), light_fields(),
                           neighbour_fields(), extra_fields()})
    all.insert(all.end(), part.begin(), part.end());
  return all;
}

}  // namespace

TableSource cycles_table(const AcquisitionView& view) {
  return source_of<Row>("cycles", fields(), [&view](const auto& emit) {
    const auto& interphases = view.records.get_or_empty<Interphases>();
    const auto& wave_entries = view.records.get_or_empty<WaveEntries>();
    const auto entries = entries_by_interphase(interphases, wave_entries);
    const auto cycles = cycle_numbers(interphases, wave_entries);
    const auto periods = interphase_periods(interphases, wave_entries);
    const auto* tube = view.records.peek<Tube>();
    for (std::size_t i = 0; i < entries.size(); ++i) {
      const auto& interphase = interphases.interphases[i];
      Row row{view.name, interphase, entries[i], cycles[i], periods[i], {}};
      if (tube && tube->axis_um.size() >= 2) row.in_tube = tube->place(interphase.place_um);
      emit(row);
    }
  });
}

}  // namespace wavefount
