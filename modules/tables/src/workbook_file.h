#pragma once

#include <xlsxwriter.h>

#include <filesystem>
#include <map>
#include <string>

namespace wavefount {

/// How a cell looks; see `WorkbookFile::format`.
enum class CellStyle {
  text,
  word,
  wrapped,
  label,
  figure,
  share,
  title,
  section,
  section_number,
  section_words,
  heading,
  note,
  failed,
  failed_wrapped
};

/// An open workbook, written row by row in constant memory beside its place and put there by
/// `commit`.
class WorkbookFile {
 public:
  /// Throws Problem when the file cannot be made.
  explicit WorkbookFile(std::filesystem::path place);
  ~WorkbookFile();
  WorkbookFile(const WorkbookFile&) = delete;
  WorkbookFile& operator=(const WorkbookFile&) = delete;

  lxw_worksheet* add_sheet(const std::string& name);
  lxw_format* format(CellStyle style) const { return styles_.at(style); }
  /// Number format with a fixed number of decimals.
  lxw_format* decimals(int count);
  /// Throws Problem when the disk is full.
  void commit();

 private:
  [[noreturn]] void refuse(const std::string& why) const;
  lxw_format* add_format(bool bold, lxw_color_t colour, double size);
  void make_styles();
  void make_text_styles();
  void make_heading_styles();

  std::filesystem::path place_, aside_;
  std::string folder_;
  lxw_workbook* workbook_ = nullptr;
  std::map<CellStyle, lxw_format*> styles_;
  std::map<int, lxw_format*> decimals_;
};

/// Puts text into a cell, cut to what a cell takes.
void write_text(lxw_worksheet* sheet, lxw_row_t row, lxw_col_t column, const std::string& text,
                lxw_format* format);

}  // namespace wavefount
