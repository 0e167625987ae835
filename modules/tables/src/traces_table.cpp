#include "fields.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/prescan.h"

namespace wavefount {
namespace {

struct Row {
  const std::string& acquisition;
  const Nucleus& nucleus;
  const TracePoint& point;
  const CameraModel* camera;
};
using Fields = std::vector<Field<Row>>;

/// Concentration in the nucleus over that in the cytoplasm: both need the camera's dark offset.
Cell nc_ratio(const Row& row) {
  if (!row.point.found || !row.camera || !row.camera->offset_given) return {};
  const double cytoplasm = row.point.cytoplasm - row.camera->dark_offset_counts;
  if (cytoplasm <= 0) return {};
  return number_cell((row.point.brightness + cytoplasm) / cytoplasm);
}

/// A point in between, at which nothing was measured, carries neither brightness nor cytoplasm.
bool measured(const TracePoint& point) {
  return point.found || point.cytoplasm != 0 || point.brightness_variance != 0;
}

Cell if_found(const Row& row, double value) {
  return row.point.found ? number_cell(value) : Cell();
}

Cell if_measured(const Row& row, double value) {
  return measured(row.point) ? number_cell(value) : Cell();
}

Fields when_fields() {
  return {
      acquisition_field<Row>(),
      {integer_column("nucleus", "Nucleus", "Number of the nucleus in its acquisition, from 1."),
       [](const Row& row) { return integer_cell(row.nucleus.id); }},
      {integer_column("frame", "Frame", "Number of the frame, from 0."),
       [](const Row& row) { return integer_cell(row.point.frame); }},
      {number_column("time_min", "Time (minutes)", 2, "Minutes since the first frame."),
       [](const Row& row) { return number_cell(row.point.time_min); }},
      {text_column("found", "Found",
                   "yes: the nucleus was seen in this frame; no: it was measured at its place "
                   "while it was not visible."),
       [](const Row& row) { return yes_no_cell(row.point.found); }},
  };
}

Fields place_fields() {
  return {
      {number_column("x_px", "x in the frame (pixels)", 2,
                     "Centre in this frame as recorded, from the centre of the top-left pixel."),
       [](const Row& row) { return number_cell(row.point.x_px); }},
      {number_column("y_px", "y in the frame (pixels)", 2,
                     "Centre in this frame as recorded, positive downwards."),
       [](const Row& row) { return number_cell(row.point.y_px); }},
      {number_column("x_um", "x (micrometres)", 1,
                     "Centre in the image of the first frame, drift removed, from the centre of "
                     "the top-left pixel."),
       [](const Row& row) { return number_cell(row.point.x_um); }},
      {number_column("y_um", "y (micrometres)", 1,
                     "Centre in the image of the first frame, drift removed, positive downwards."),
       [](const Row& row) { return number_cell(row.point.y_um); }},
      {number_column("area_um2", "Area (square micrometres)", 1,
                     "Area inside the half-maximum outline."),
       [](const Row& row) { return if_found(row, row.point.area_um2); }},
  };
}

Fields light_fields() {
  return {
      {number_column("brightness", "Brightness (counts)", 1,
                     "Mean inside the outline above the local cytoplasm, in camera counts."),
       [](const Row& row) { return if_measured(row, row.point.brightness); }},
      {number_column("cytoplasm", "Cytoplasm (counts)", 1,
                     "Local cytoplasm around the nucleus in camera counts, dark offset included."),
       [](const Row& row) { return if_measured(row, row.point.cytoplasm); }},
      {number_column("nc_ratio", "Nucleus over cytoplasm", 3,
                     "Brightness of the nucleus over that of the cytoplasm, both above the "
                     "camera's dark offset; empty while the offset is not known."),
       nc_ratio},
      {number_column("integrated", "Integrated light (counts)", 0,
                     "Whole light of the nucleus above the local cytoplasm, in camera counts."),
       [](const Row& row) { return if_found(row, row.point.integrated); }},
      {text_column("doubtful", "Doubtful",
                   "yes: touching another nucleus, saturated, at the border or out of focus, so "
                   "this point was not used for fits."),
       [](const Row& row) { return yes_no_cell(row.point.doubtful); }},
  };
}

Fields fields() {
  Fields all = when_fields();
  for (auto& field : place_fields()) all.push_back(field);
  for (auto& field : light_fields()) all.push_back(field);
  return all;
}

}  // namespace

TableSource traces_table(const AcquisitionView& view) {
  return source_of<Row>("traces", fields(), [&view](const auto& row) {
    const auto* camera = view.records.peek<CameraModel>();
    for (const auto& nucleus : view.records.get_or_empty<Nuclei>().nuclei)
      for (const auto& point : nucleus.points) row({view.name, nucleus, point, camera});
  });
}

}  // namespace wavefount
