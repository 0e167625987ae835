#include <algorithm>

#include "fields.h"
#include "wavefount/tables/film_quality.h"

namespace wavefount {
namespace {

struct Row {
  const std::string& acquisition;
  const AcquisitionView& view;
  const FilmDescription& film;
  const Tube& tube;
};
using Fields = std::vector<Field<Row>>;

long long count_of_nuclei(const Row& row) {
  return static_cast<long long>(row.view.records.get_or_empty<Nuclei>().nuclei.size());
}

const std::vector<Wave>& waves_of(const Row& row) {
  return row.view.records.get_or_empty<Waves>().waves;
}

long long waves_in_review(const Row& row) {
  const auto& waves = waves_of(row);
  return std::count_if(waves.begin(), waves.end(), [](const Wave& wave) { return wave.review; });
}

Cell end_cell(const Row& row, Boundary Tube::*end) {
  if (row.tube.axis_um.size() < 2) return {};
  return std::string(row.tube.*end == Boundary::closed ? "closed" : "open");
}

Cell if_measured(const Row& row, double Tube::*length) {
  return row.tube.measured ? number_cell(row.tube.*length) : Cell();
}

Fields course_fields() {
  return {
      acquisition_field<Row>(),
      {text_column("status", "Status", "done: measured; failed: see the message."),
       [](const Row&) { return Cell(std::string("done")); }},
      {text_column("message", "Message", "Why it failed, or what to be aware of."),
       [](const Row& row) { return text_cell(row.view.messages.summary()); }},
      {integer_column("frames", "Frames", "Number of frames."),
       [](const Row& row) { return integer_cell(row.film.frames); }},
      {number_column("duration_min", "Duration (minutes)", 1,
                     "Time from the first frame to the last."),
       [](const Row& row) {
         return row.film.times_min.empty() ? Cell() : number_cell(row.film.times_min.back());
       }},
      {number_column("frame_interval_min", "Frame interval (minutes)", 3,
                     "Median time from frame to frame; empty for a single frame."),
       [](const Row& row) {
         return row.film.frames > 1 ? number_cell(row.film.frame_interval_min()) : Cell();
       }},
      {number_column("pixel_um", "Pixel (micrometres)", 4, "Side of one pixel."),
       [](const Row& row) {
         return row.film.pixel_um > 0 ? number_cell(row.film.pixel_um) : Cell();
       }},
  };
}

Fields tube_fields() {
  return {
      {number_column("tube_width_um", "Tube width, measured (micrometres)", 1,
                     "Width of the tube as measured in the film; empty without an outline."),
       [](const Row& row) { return if_measured(row, &Tube::width_um); }},
      {number_column("tube_length_um", "Tube length in view (micrometres)", 1,
                     "Length of the tube's axis in view; empty without an outline."),
       [](const Row& row) { return if_measured(row, &Tube::length_um); }},
      {text_column("left_end", "Left (top) end",
                   "closed: in view; open: the tube runs out of the image there."),
       [](const Row& row) { return end_cell(row, &Tube::left_end); }},
      {text_column("right_end", "Right (bottom) end",
                   "closed: in view; open: the tube runs out of the image there."),
       [](const Row& row) { return end_cell(row, &Tube::right_end); }},
  };
}

Fields found_fields() {
  return {
      {integer_column("nuclei", "Nuclei", "Number of nuclei followed."),
       [](const Row& row) { return integer_cell(count_of_nuclei(row)); }},
      {integer_column("waves", "Waves", "Number of mitotic waves."),
       [](const Row& row) { return integer_cell(static_cast<long long>(waves_of(row).size())); }},
      {integer_column("waves_in_review", "Waves for review",
                      "Number of waves that a person should look at."),
       [](const Row& row) { return integer_cell(waves_in_review(row)); }},
  };
}

Fields quality_fields() {
  return {
      {number_column("drift_um", "Drift (micrometres)", 1,
                     "Largest distance that the picture moved from where it was in the first "
                     "frame."),
       [](const Row& row) {
         const auto& drift = row.view.records.get_or_empty<Drift>();
         return number_cell(largest_drift_um(drift, row.film.pixel_um));
       }},
      {number_column("bleaching_percent", "Bleaching (per cent)", 1,
                     "Light of the tube lost over the film; empty where light can enter or leave "
                     "the view."),
       [](const Row& row) {
         const auto& observations = row.view.records.get_or_empty<Observations>();
         return number_cell(
             bleaching_percent(observations, row.tube, row.view.records.peek<CameraModel>()));
       }},
      {number_column("signal_to_noise", "Signal to noise", 1,
                     "Median brightness of nuclei over the camera's noise of one pixel of "
                     "cytoplasm."),
       [](const Row& row) {
         return number_cell(signal_to_noise(row.view.records.get_or_empty<Nuclei>(),
                                            row.view.records.peek<CameraModel>()));
       }},
      {number_column("last_healthy_min", "Healthy until (minutes)", 1,
                     "Time up to which the extract cycles: from the sidecar, else the start of "
                     "the first terminal wave, else the last frame."),
       [](const Row& row) {
         return number_cell(last_healthy_min(row.film, row.view.records.get_or_empty<Waves>()));
       }},
  };
}

/// Columns of the acquisition sheet, carried along as they were written.
Fields sheet_fields(const FilmDescription& film) {
  Fields fields;
  for (const auto& name : film.sheet_columns) {
    fields.push_back({sheet_column(name), [name](const Row& row) {
                        const auto at = row.film.sheet.find(name);
                        return at == row.film.sheet.end() ? Cell() : text_cell(at->second);
                      }});
  }
  return fields;
}

Fields fields(const FilmDescription& film) {
  Fields all = course_fields();
  for (const auto& part : {tube_fields(), found_fields(), quality_fields(), sheet_fields(film)})
    all.insert(all.end(), part.begin(), part.end());
  return all;
}

}  // namespace

Column sheet_column(const std::string& name) {
  return text_column("sheet_" + name, "Sheet: " + name,
                     "Column " + name + " of the acquisition sheet, as written there.");
}

TableSource acquisitions_table(const AcquisitionView& view) {
  const auto& film = view.records.get_or_empty<FilmDescription>();
  return source_of<Row>("acquisitions", fields(film), [&view, &film](const auto& row) {
    row({view.name, view, film, view.records.get_or_empty<Tube>()});
  });
}

}  // namespace wavefount
