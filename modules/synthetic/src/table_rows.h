#pragma once

#include <filesystem>
#include <functional>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace wavefount {

/// One row of a CSV file, read by column name.
class TableRow {
 public:
  TableRow(const std::filesystem::path& file, const std::vector<std::string>& header);

  void take(std::vector<std::string> cells, int line);
  /// Empty when the cell is. Throws Problem when the column does not exist.
  std::string text(std::string_view column) const;
  /// Throws Problem when the cell holds something that is not a number.
  std::optional<double> number(std::string_view column) const;
  std::optional<int> integer(std::string_view column) const;
  /// The same where a value must stand.
  double required(std::string_view column) const;
  int required_integer(std::string_view column) const;
  bool yes(std::string_view column) const { return text(column) == "yes"; }

 private:
  const std::filesystem::path& file_;
  const std::vector<std::string>& header_;
  std::vector<std::string> cells_;
  int line_ = 0;
};

/// Calls back for each row of a CSV file. Throws Problem when it cannot be read.
void each_row(const std::filesystem::path& file, const std::function<void(const TableRow&)>& take);

}  // namespace wavefount
