#include "wavefount/tables/gather.h"

#include <algorithm>
#include <array>
#include <fstream>
#include <map>
#include <string>
#include <vector>

#include "wavefount/acquisition/csv_reader.h"
#include "wavefount/core/problem.h"
#include "wavefount/tables/csv_writer.h"
#include "wavefount/tables/file_aside.h"
#include "wavefount/tables/table_source.h"

namespace wavefount {
namespace {

constexpr std::size_t copy_bytes = 1 << 18;

std::string header_line(const std::vector<Column>& columns) {
  std::string line;
  for (const auto& column : columns) line += csv_quoted(csv_text(column.name)) + ',';
  line.pop_back();
  return line + "\r\n";
}

/// Whether the file starts with this header and ends with a whole line.
bool is_whole_table(std::ifstream& stream, const std::string& header) {
  std::string start(header.size(), '\0');
  stream.read(start.data(), static_cast<std::streamsize>(start.size()));
  if (!stream || start != header) return false;
  std::array<char, 2> end{};
  stream.seekg(-2, std::ios::end);
  stream.read(end.data(), 2);
  return stream && end == std::array{'\r', '\n'};
}

/// Appends the rows of one table as they stand; false when the table is not one of ours.
bool append_rows(const std::filesystem::path& file, const std::string& header, FileAside& root) {
  std::ifstream stream(file, std::ios::binary);
  if (!stream || !is_whole_table(stream, header)) return false;
  stream.seekg(static_cast<std::streamoff>(header.size()));
  std::vector<char> buffer(copy_bytes);
  while (stream) {
    stream.read(buffer.data(), static_cast<std::streamsize>(buffer.size()));
    root.write({buffer.data(), static_cast<std::size_t>(stream.gcount())});
  }
  return true;
}

void warn_of(const FolderWork& work, const std::filesystem::path& file) {
  if (!work.messages) return;
  work.messages->warn("The table " + file.string() +
                      " is missing, cut short or not of this version, so its rows are not in the "
                      "joined table; run that acquisition again with --again.");
}

void join_table(FolderWork& work, const Table& table) {
  const auto header = header_line(table.columns);
  FileAside root(work.output / (table.name + ".csv"));
  root.write(header);
  for (const auto& acquisition : work.acquisitions) {
    if (!acquisition.done) continue;
    const auto file = acquisition.folder / (table.name + ".csv");
    if (!append_rows(file, header, root)) warn_of(work, file);
  }
  root.commit();
}

/// The `sheet_` columns of all acquisitions, in the order in which they first come.
std::vector<std::string> union_of_sheet_columns(const FolderWork& work) {
  std::vector<std::string> columns;
  for (const auto& acquisition : work.acquisitions)
    for (const auto& column : acquisition.sheet_columns)
      if (std::find(columns.begin(), columns.end(), column) == columns.end())
        columns.push_back(column);
  return columns;
}

using Header = std::vector<std::string>;

/// A cell of a column by name; empty where the row's table has no such column.
std::string cell_of(const CsvTable& table, const std::vector<std::string>& row,
                    const std::string& name) {
  const int at = table.column(name);
  return at < 0 ? std::string() : row[static_cast<std::size_t>(at)];
}

/// The acquisition's own row; no rows, and a warning, when its file is not a table of ours.
CsvTable own_rows(const FolderWork& work, const AcquisitionResult& acquisition) {
  const auto file = acquisition.folder / "acquisitions.csv";
  try {
    return read_csv(file);
  } catch (const Problem&) {
    warn_of(work, file);
    return {};
  }
}

void add_done(const FolderWork& work, const AcquisitionResult& acquisition, const Header& header,
              CsvWriter& writer) {
  const auto table = own_rows(work, acquisition);
  for (const auto& row : table.rows) {
    std::vector<std::string> cells;
    for (const auto& name : header) cells.push_back(cell_of(table, row, name));
    writer.copied_row(cells);
  }
}

void add_failed(const AcquisitionResult& acquisition, const Header& header, CsvWriter& writer) {
  std::map<std::string, std::string> values = {
      {"acquisition", acquisition.name}, {"status", "failed"}, {"message", acquisition.message}};
  for (const auto& [column, value] : acquisition.sheet) values["sheet_" + column] = value;
  std::vector<std::string> cells;
  for (const auto& name : header) cells.push_back(csv_text(values[name]));
  writer.copied_row(cells);
}

void join_acquisitions(FolderWork& work) {
  auto columns = declared_table("acquisitions").columns;
  for (const auto& name : union_of_sheet_columns(work)) columns.push_back(sheet_column(name));
  Header header;
  for (const auto& column : columns) header.push_back(csv_text(column.name));
  CsvWriter writer(work.output / "acquisitions.csv");
  writer.header(columns);
  for (const auto& acquisition : work.acquisitions) {
    if (acquisition.done)
      add_done(work, acquisition, header, writer);
    else
      add_failed(acquisition, header, writer);
  }
  writer.commit();
}

}  // namespace

void gather_tables(FolderWork& work) {
  for (const auto& table : declared_tables())
    if (table.name != "acquisitions") join_table(work, table);
  join_acquisitions(work);
}

}  // namespace wavefount
