#include <algorithm>

#include "fields.h"
#include "wavefount/core/doubts.h"
#include "wavefount/core/tube.h"
#include "wavefount/core/wave.h"

namespace wavefount {
namespace {

struct Row {
  std::string acquisition;
  int wave = 0;  ///< 0: of the acquisition as a whole
  std::string reason;
  std::string detail;
  double priority = 0;
};
using Fields = std::vector<Field<Row>>;

/// A doubtful outline shifts every place and site in the tube: after the undecided waves, before
/// the decided ones.
constexpr double outline_priority = 0.6;

/// Waves whose answer is open come first: there a person can decide something.
double priority_of(const Wave& wave) {
  if (wave.fate == Fate::terminal) return 0.7;
  switch (wave.answer) {
    case Answer::ambiguous:
      return 0.9;
    case Answer::incoherent:
      return 0.8;
    case Answer::coexisting:
      return 0.5;
    case Answer::single:
      return 0.4;
    case Answer::too_few:
    case Answer::synchronous:
    case Answer::enters_view:
      return 0.3;
  }
  return 0;
}

Fields asked_fields() {
  return {
      acquisition_field<Row>(),
      {integer_column("wave", "Wave", "Number of the wave; empty when it is not about one."),
       [](const Row& row) { return row.wave > 0 ? integer_cell(row.wave) : Cell(); }},
      {text_column("reason", "Reason", "What is doubtful, in a word or two."),
       [](const Row& row) { return text_cell(row.reason); }},
      {text_column("detail", "Detail", "The doubt in a sentence."),
       [](const Row& row) { return text_cell(row.detail); }},
      {number_column("priority", "Priority", 2, "0 to 1, the most urgent near 1."),
       [](const Row& row) { return number_cell(row.priority); }},
  };
}

/// Columns that a person fills in.
Fields decided_fields() {
  const auto empty = [](const Row&) { return Cell(); };
  return {
      {text_column("verdict", "Verdict", "What the reviewer decided."), empty},
      {text_column("origins_accepted", "Origins accepted",
                   "Numbers of the origins that the reviewer accepts."),
       empty},
      {text_column("comment", "Comment", "The reviewer's comment."), empty},
      {text_column("reviewer", "Reviewer", "Who decided."), empty},
      {text_column("decided_at", "Decided at", "Date and time of the decision."), empty},
  };
}

Fields fields() {
  Fields all = asked_fields();
  for (auto& field : decided_fields()) all.push_back(field);
  return all;
}

void add_wave(std::vector<Row>& rows, const std::string& acquisition, const Wave& wave) {
  if (!wave.review) return;
  const double priority = priority_of(wave);
  if (wave.reasons.empty()) {
    rows.push_back({acquisition, wave.number, name_of(wave.answer), {}, priority});
    return;
  }
  for (std::size_t i = 0; i < wave.reasons.size(); ++i) {
    const auto& details = wave.reason_details;
    rows.push_back({acquisition, wave.number, wave.reasons[i],
                    i < details.size() ? details[i] : std::string(), priority});
  }
}

std::vector<Row> rows_of(const AcquisitionView& view) {
  std::vector<Row> rows;
  for (const auto& wave : view.records.get_or_empty<Waves>().waves) add_wave(rows, view.name, wave);
  for (const auto& doubt : view.records.get_or_empty<Doubts>().doubts)
    rows.push_back({view.name, 0, doubt.reason, doubt.detail, doubt.priority});
  for (const auto& detail : view.records.get_or_empty<Tube>().doubts)
    rows.push_back({view.name, 0, "outline", detail, outline_priority});
  std::stable_sort(rows.begin(), rows.end(), [](const Row& left, const Row& right) {
    return left.priority > right.priority;
  });
  return rows;
}

}  // namespace

TableSource review_table(const AcquisitionView& view) {
  return source_of<Row>("review", fields(), [&view](const auto& emit) {
    for (const auto& row : rows_of(view)) emit(row);
  });
}

}  // namespace wavefount
