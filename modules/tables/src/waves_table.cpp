#include <algorithm>

#include "fields.h"
#include "slowness_fields.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

struct Row {
  const std::string& acquisition;
  const Wave& wave;
};
using Fields = std::vector<Field<Row>>;

long long claimed_origins(const Wave& wave) {
  return std::count_if(wave.origins.begin(), wave.origins.end(),
                       [](const Origin& origin) { return origin.claimed; });
}

Fields course_fields() {
  return {
      acquisition_field<Row>(),
      {integer_column("wave", "Wave", "Number of the wave in its acquisition, by its start."),
       [](const Row& row) { return integer_cell(row.wave.number); }},
      {integer_column("cycle", "Cycle", "Number of the cycle whose mitosis it brings."),
       [](const Row& row) { return integer_cell(row.wave.cycle); }},
      {integer_column("nuclei", "Nuclei", "Number of nuclei that entered mitosis with it."),
       [](const Row& row) {
         return integer_cell(static_cast<long long>(row.wave.entries.size()));
       }},
      {number_column("start_min", "Start (minutes)", 2, "Time of its first mitotic entry."),
       [](const Row& row) { return number_cell(row.wave.start_min); }},
      {number_column("end_min", "End (minutes)", 2, "Time of its last mitotic entry."),
       [](const Row& row) { return number_cell(row.wave.end_min); }},
      {number_column("period_min", "Period (minutes)", 2,
                     "Median over its nuclei of the time since the wave before."),
       [](const Row& row) { return number_cell(row.wave.period_min); }},
      {text_column("fate", "Fate",
                   "confirmed: its nuclei form again; terminal: watched long enough, they do not "
                   "(arrest or death); unconfirmed: the film ends first."),
       [](const Row& row) { return text_cell(name_of(row.wave.fate)); }},
  };
}

Fields answer_fields() {
  return {
      {text_column("answer", "Answer",
                   "What can be said of where it began: too-few, synchronous, incoherent, "
                   "enters-view, coexisting, single or ambiguous."),
       [](const Row& row) { return text_cell(name_of(row.wave.answer)); }},
      {text_column("site", "Site of the origin",
                   "Where the claimed origin lies: end, wall, interior or view-edge; empty when "
                   "none is claimed or claimed ones differ."),
       [](const Row& row) { return row.wave.site ? text_cell(name_of(*row.wave.site)) : Cell(); }},
      {integer_column("origins", "Claimed origins", "Number of origins claimed for the wave."),
       [](const Row& row) { return integer_cell(claimed_origins(row.wave)); }},
      {text_column("review", "For review", "yes: a person should look at this wave."),
       [](const Row& row) { return yes_no_cell(row.wave.review); }},
      {text_column("reasons", "Reasons", "Why, or what is particular, with semicolons between."),
       [](const Row& row) { return text_cell(joined(row.wave.reasons, ";")); }},
      {number_column("jitter_min", "Jitter of nuclei (minutes)", 3,
                     "Fitted scatter of the nuclei's mitotic entries around the smooth front."),
       [](const Row& row) { return number_cell(row.wave.jitter_min); }},
  };
}

Fields fields() {
  Fields all = course_fields();
  for (const auto& part :
       {slowness_fields<Row>([](const Row& row) { return row.wave.slowness; }), answer_fields()})
    all.insert(all.end(), part.begin(), part.end());
  return all;
}

}  // namespace

TableSource waves_table(const AcquisitionView& view) {
  return source_of<Row>("waves", fields(), [&view](const auto& row) {
    for (const auto& wave : view.records.get_or_empty<Waves>().waves) row({view.name, wave});
  });
}

}  // namespace wavefount
