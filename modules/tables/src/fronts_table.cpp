#include "fields.h"
#include "slowness_fields.h"

namespace wavefount {
namespace {

struct Row {
  const std::string& acquisition;
  const Wave& wave;
  const Front& front;
};
using Fields = std::vector<Field<Row>>;

Fields way_fields() {
  return {
      acquisition_field<Row>(),
      {integer_column("wave", "Wave", "Number of the wave in its acquisition."),
       [](const Row& row) { return integer_cell(row.wave.number); }},
      {integer_column("origin", "Origin",
                      "Number of the origin that the arm comes from; empty when it comes from "
                      "outside the view."),
       [](const Row& row) {
         return row.front.origin > 0 ? integer_cell(row.front.origin) : Cell();
       }},
      {text_column("direction", "Direction", "Way it goes: left, right, inwards or outwards."),
       [](const Row& row) { return text_cell(row.front.direction); }},
      {number_column("from_um", "From (micrometres along the tube)", 1,
                     "Where along the tube the fitted arm begins."),
       [](const Row& row) { return number_cell(row.front.from_um); }},
      {number_column("to_um", "To (micrometres along the tube)", 1,
                     "Where along the tube the fitted arm ends."),
       [](const Row& row) { return number_cell(row.front.to_um); }},
      {integer_column("nuclei", "Nuclei", "Number of nuclei in the fit of the arm."),
       [](const Row& row) { return integer_cell(row.front.nuclei); }},
  };
}

Fields time_fields() {
  return {
      {number_column("from_min", "Fitted start (minutes)", 2, "Fitted time where the arm begins."),
       [](const Row& row) { return number_cell(row.front.from_min); }},
      {number_column("to_min", "Fitted end (minutes)", 2, "Fitted time where the arm ends."),
       [](const Row& row) { return number_cell(row.front.to_min); }},
  };
}

Fields fields() {
  Fields all = way_fields();
  for (const auto& part :
       {slowness_fields<Row>([](const Row& row) { return row.front.slowness; }), time_fields()})
    all.insert(all.end(), part.begin(), part.end());
  return all;
}

}  // namespace

TableSource fronts_table(const AcquisitionView& view) {
  return source_of<Row>("fronts", fields(), [&view](const auto& row) {
    for (const auto& wave : view.records.get_or_empty<Waves>().waves)
      for (const auto& front : wave.fronts) row({view.name, wave, front});
  });
}

}  // namespace wavefount
