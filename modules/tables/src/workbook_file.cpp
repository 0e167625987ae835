#include "workbook_file.h"

#include <system_error>
#include <utility>

#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"
#include "wavefount/core/version.h"
#include "wavefount/tables/file_aside.h"

namespace wavefount {
namespace {

/// A cell takes 32,767 characters (ECMA-376); a character of UTF-8 has at most four bytes, and the
/// cut is made on bytes.
constexpr std::size_t most_cell_bytes = 32'000;

/// 2000-01-01 00:00 UTC: a creation date of its own would make every file differ.
constexpr time_t fixed_creation_date = 946'684'800;

constexpr lxw_color_t ink = 0x22303C;
constexpr lxw_color_t deep = 0x1D4D6B;
constexpr lxw_color_t pale = 0xE6EEF2;
constexpr lxw_color_t grey = 0x66737D;
constexpr lxw_color_t warning = 0x9C3B12;
constexpr double body_size = 10;

}  // namespace

WorkbookFile::WorkbookFile(std::filesystem::path place)
    : place_(std::move(place)), aside_(aside_of(place_)), folder_(place_.parent_path().string()) {
  lxw_workbook_options options{};
  options.constant_memory = 1;
  options.use_zip64 = 0;
  if (!folder_.empty()) options.tmpdir = folder_.data();
  workbook_ = workbook_new_opt(aside_.c_str(), &options);
  if (!workbook_) refuse("there is no memory for it");
  lxw_doc_properties properties{};
  char title[] = "Mitotic waves: what was measured";
  char comments[] = "Written by Wavefount " WAVEFOUNT_VERSION ". For research use only.";
  properties.title = title;
  properties.comments = comments;
  properties.created = fixed_creation_date;
  workbook_set_properties(workbook_, &properties);
  make_styles();
}

WorkbookFile::~WorkbookFile() {
  if (workbook_) lxw_workbook_free(workbook_);
  std::error_code ignored;
  std::filesystem::remove(aside_, ignored);
}

lxw_worksheet* WorkbookFile::add_sheet(const std::string& name) {
  auto* sheet = workbook_add_worksheet(workbook_, name.c_str());
  if (!sheet) refuse("no further sheet can be added");
  return sheet;
}

lxw_format* WorkbookFile::decimals(int count) {
  auto& format = decimals_[count];
  if (!format) {
    format = add_format(false, ink, body_size);
    const auto pattern = count > 0 ? "0." + std::string(static_cast<std::size_t>(count), '0') : "0";
    format_set_num_format(format, pattern.c_str());
  }
  return format;
}

void WorkbookFile::commit() {
  const auto error = workbook_close(std::exchange(workbook_, nullptr));
  if (error != LXW_NO_ERROR) refuse(lxw_strerror(error));
  std::error_code failure;
  std::filesystem::rename(aside_, place_, failure);
  if (failure) refuse(failure.message());
}

void WorkbookFile::refuse(const std::string& why) const {
  throw Problem("The workbook " + place_.string() + " cannot be written: " + why +
                "; close it elsewhere, free space there, or choose another --out.");
}

lxw_format* WorkbookFile::add_format(bool bold, lxw_color_t colour, double size) {
  auto* format = workbook_add_format(workbook_);
  format_set_font_name(format, "Calibri");
  format_set_font_size(format, size);
  format_set_font_color(format, colour);
  format_set_align(format, LXW_ALIGN_VERTICAL_TOP);
  if (bold) format_set_bold(format);
  return format;
}

void WorkbookFile::make_styles() {
  make_text_styles();
  make_heading_styles();
  auto* figure = add_format(true, deep, 14);
  format_set_num_format(figure, "#,##0.##");
  format_set_align(figure, LXW_ALIGN_RIGHT);
  styles_[CellStyle::figure] = figure;
  auto* share = add_format(false, ink, body_size);
  format_set_num_format(share, "0 %");
  styles_[CellStyle::share] = share;
}

void WorkbookFile::make_text_styles() {
  styles_[CellStyle::text] = add_format(false, ink, body_size);
  auto* word = add_format(false, ink, body_size);  // clear of the number to its left
  format_set_indent(word, 1);
  styles_[CellStyle::word] = word;
  auto* wrapped = add_format(false, ink, body_size);
  format_set_text_wrap(wrapped);
  format_set_indent(wrapped, 1);
  styles_[CellStyle::wrapped] = wrapped;
  auto* label = add_format(false, ink, 11);
  format_set_align(label, LXW_ALIGN_VERTICAL_CENTER);
  styles_[CellStyle::label] = label;
  auto* note = add_format(false, grey, body_size);
  format_set_align(note, LXW_ALIGN_VERTICAL_CENTER);
  format_set_indent(note, 1);
  styles_[CellStyle::note] = note;
  styles_[CellStyle::failed] = add_format(true, warning, body_size);
  auto* failed_wrapped = add_format(false, warning, body_size);
  format_set_text_wrap(failed_wrapped);
  format_set_indent(failed_wrapped, 1);
  styles_[CellStyle::failed_wrapped] = failed_wrapped;
}

void WorkbookFile::make_heading_styles() {
  styles_[CellStyle::title] = add_format(true, deep, 20);
  for (const auto style :
       {CellStyle::section, CellStyle::section_number, CellStyle::section_words}) {
    auto* section = add_format(true, deep, style == CellStyle::section ? 13 : body_size);
    format_set_bottom(section, LXW_BORDER_MEDIUM);
    format_set_bottom_color(section, deep);
    format_set_align(section, LXW_ALIGN_VERTICAL_BOTTOM);
    if (style == CellStyle::section_number) format_set_align(section, LXW_ALIGN_RIGHT);
    if (style == CellStyle::section_words) format_set_indent(section, 1);
    styles_[style] = section;
  }
  auto* heading = add_format(true, deep, body_size);
  format_set_text_wrap(heading);
  format_set_bg_color(heading, pale);
  format_set_bottom(heading, LXW_BORDER_THIN);
  format_set_bottom_color(heading, deep);
  styles_[CellStyle::heading] = heading;
}

void write_text(lxw_worksheet* sheet, lxw_row_t row, lxw_col_t column, const std::string& text,
                lxw_format* format) {
  if (text.size() <= most_cell_bytes) {
    worksheet_write_string(sheet, row, column, text.c_str(), format);
    return;
  }
  auto end = most_cell_bytes;
  while ((static_cast<unsigned char>(text[end]) & 0xC0) == 0x80) --end;
  worksheet_write_string(sheet, row, column, (text.substr(0, end) + "…").c_str(), format);
}

}  // namespace wavefount
