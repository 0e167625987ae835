#include "summary_sheet.h"

#include <algorithm>
#include <optional>

#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

constexpr double label_width = 46;
constexpr double figure_width = 14;
constexpr double words_width = 100;
constexpr double title_height = 30;   // points
constexpr double figure_height = 20;  // points
constexpr lxw_col_t words_column = 5;
constexpr double line_height = 13;       // points of a line of text
constexpr double letters_of_line = 110;  // that fit into the column of words
constexpr lxw_color_t bar_colour = 0x8FB7C9;

class SummarySheet {
 public:
  SummarySheet(WorkbookFile& workbook, lxw_worksheet* sheet, const FolderSummary& summary)
      : workbook_(workbook), sheet_(sheet), summary_(summary) {}

  void fill(const std::vector<std::string>& cut_notes) {
    shape();
    head(cut_notes);
    figures();
    answers();
    sites();
    review();
    acquisitions();
  }

 private:
  void shape() {
    worksheet_set_column(sheet_, 0, 0, label_width, nullptr);
    worksheet_set_column(sheet_, 1, words_column - 1, figure_width, nullptr);
    worksheet_set_column(sheet_, words_column, words_column, words_width, nullptr);
    worksheet_gridlines(sheet_, LXW_HIDE_ALL_GRIDLINES);
    worksheet_set_landscape(sheet_);
    worksheet_fit_to_pages(sheet_, 1, 0);
  }

  void text(lxw_col_t column, const std::string& words, CellStyle style) {
    write_text(sheet_, row_, column, words, workbook_.format(style));
  }

  void number(lxw_col_t column, double value, lxw_format* format) {
    worksheet_write_number(sheet_, row_, column, value, format);
  }

  void head(const std::vector<std::string>& cut_notes) {
    worksheet_set_row(sheet_, row_, title_height, nullptr);
    text(0, "What was found", CellStyle::title);
    ++row_;
    text(0,
         "For research use only, not for diagnosis. Work with animals and animal material falls "
         "under the approvals of your institution and country.",
         CellStyle::text);
    for (const auto& note : cut_notes) {
      ++row_;
      text(0, note, CellStyle::failed);
    }
    row_ += 2;
  }

  void figure(const std::string& label, std::optional<double> value, const std::string& words) {
    worksheet_set_row(sheet_, row_, figure_height, nullptr);
    text(0, label, CellStyle::label);
    if (value) number(1, *value, workbook_.format(CellStyle::figure));
    text(2, words, CellStyle::note);
    ++row_;
  }

  void figures() {
    figure("Acquisitions measured", summary_.done(), failed_words());
    figure("Nuclei followed", static_cast<double>(summary_.nuclei()), {});
    figure("Mitotic waves", static_cast<double>(summary_.waves()), terminal_words());
    figure("Median speed of the waves (µm/min)", median_speed(), speed_words());
    figure("Things for a person to look at", summary_.review_rows(),
           summary_.review_rows() > 0 ? "listed by priority on the sheet review" : "");
    ++row_;
  }

  std::string failed_words() const {
    const int failed = summary_.failed();
    if (failed == 0) return "none failed";
    return std::to_string(failed) + " failed: see the lines in red below";
  }

  std::string terminal_words() const {
    const int terminal = summary_.terminal_waves;
    if (terminal == 0) return {};
    return std::to_string(terminal) +
           " of them final (nuclei did not form again: arrest or death), left out of what follows";
  }

  std::optional<double> median_speed() const {
    if (summary_.speeds_um_per_min.empty()) return std::nullopt;
    // Three digits: no wave's speed is known better.
    return parse_number(rounded_text(median(summary_.speeds_um_per_min), 3));
  }

  std::string speed_words() const {
    const auto& speeds = summary_.speeds_um_per_min;
    if (speeds.empty()) return "no wave has a measured speed";
    const auto [low, high] = std::minmax_element(speeds.begin(), speeds.end());
    return "from " + rounded_text(*low, 3) + " to " + rounded_text(*high, 3) + " in the " +
           std::to_string(speeds.size()) + " waves that have a measured speed";
  }

  /// A line of headings; all but those of words stand over numbers.
  void section(const std::string& title, const std::vector<std::string>& over_numbers,
               const std::string& over_words = {}) {
    text(0, title, CellStyle::section);
    for (lxw_col_t i = 1; i < words_column; ++i)
      text(i, i <= over_numbers.size() ? over_numbers[i - 1] : std::string(),
           CellStyle::section_number);
    text(words_column, over_words, CellStyle::section_words);
    ++row_;
  }

  struct Count {
    std::string words;
    int count = 0;
  };

  /// Rows of words, count and share, the most frequent first, with bars behind the shares.
  void counts(const std::string& title, std::vector<Count> rows) {
    if (rows.empty()) return;
    std::stable_sort(rows.begin(), rows.end(), [](const Count& left, const Count& right) {
      return left.count > right.count;
    });
    int sum = 0;
    for (const auto& row : rows) sum += row.count;
    section(title, {"Number", "Share"});
    const auto first = row_;
    for (const auto& row : rows) {
      text(0, row.words, CellStyle::text);
      number(1, row.count, workbook_.decimals(0));
      number(2, static_cast<double>(row.count) / sum, workbook_.format(CellStyle::share));
      ++row_;
    }
    bars(first, row_ - 1);
    ++row_;
  }

  void bars(lxw_row_t first, lxw_row_t last) {
    lxw_conditional_format bar{};
    bar.type = LXW_CONDITIONAL_DATA_BAR;
    bar.min_rule_type = LXW_CONDITIONAL_RULE_TYPE_NUMBER;
    bar.min_value = 0;
    bar.max_rule_type = LXW_CONDITIONAL_RULE_TYPE_NUMBER;
    bar.max_value = 1;
    bar.bar_color = bar_colour;
    bar.bar_solid = 1;
    worksheet_conditional_format_range(sheet_, first, 2, last, 2, &bar);
  }

  void answers() {
    std::vector<Count> rows;
    for (const auto& [answer, count] : summary_.answers)
      rows.push_back({"Waves " + answer_in_words(answer) + " (" + answer + ')', count});
    counts("How the waves began", rows);
  }

  void sites() {
    std::vector<Count> rows;
    for (const auto& [site, count] : summary_.origin_sites)
      rows.push_back({site_in_words(site) + " (" + site + ')', count});
    counts("Where the claimed origins lie", rows);
  }

  void review() {
    std::vector<Count> rows;
    for (const auto& [reason, count] : summary_.review_reasons) rows.push_back({reason, count});
    counts("What waits for review, by reason", rows);
  }

  void acquisitions() {
    section("Each acquisition", {"Nuclei", "Waves", "Speed, µm/min", "For review"}, "In words");
    for (const auto& one : summary_.acquisitions) acquisition(one);
  }

  void acquisition(const AcquisitionSummary& one) {
    const auto words = in_words(one);
    const double lines = 1 + static_cast<double>(words.size()) / letters_of_line;
    worksheet_set_row(sheet_, row_, line_height * static_cast<int>(lines) + 2, nullptr);
    text(0, one.name, one.done ? CellStyle::text : CellStyle::failed);
    if (one.done) {
      number(1, static_cast<double>(one.nuclei), workbook_.decimals(0));
      number(2, static_cast<double>(one.waves), workbook_.decimals(0));
      if (!one.speeds_um_per_min.empty())
        number(3, median(one.speeds_um_per_min), workbook_.decimals(1));
      number(4, static_cast<double>(one.waves_in_review), workbook_.decimals(0));
    }
    text(words_column, words, one.done ? CellStyle::wrapped : CellStyle::failed_wrapped);
    ++row_;
  }

  WorkbookFile& workbook_;
  lxw_worksheet* sheet_;
  const FolderSummary& summary_;
  lxw_row_t row_ = 0;
};

}  // namespace

void fill_summary_sheet(WorkbookFile& workbook, lxw_worksheet* sheet, const FolderSummary& summary,
                        const std::vector<std::string>& cut_notes) {
  SummarySheet(workbook, sheet, summary).fill(cut_notes);
}

}  // namespace wavefount
