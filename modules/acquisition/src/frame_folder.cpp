#include "frame_folder.h"

#include <algorithm>
#include <array>
#include <fstream>
#include <sstream>

#include "tiff_index.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

constexpr std::string_view companion_ending = ".companion.ome";
constexpr std::array<std::string_view, 6> tiff_endings = {".ome.tif", ".ome.tiff", ".ome.btf",
                                                          ".tif",     ".tiff",     ".btf"};

/// Length of the ending; 0 where the name has none or is nothing else.
std::size_t ending_length(const std::string& name, std::string_view ending) {
  return name.size() > ending.size() && lower_case(name).ends_with(ending) ? ending.size() : 0;
}

std::size_t tiff_ending_length(const std::string& name) {
  std::size_t longest = 0;
  for (const auto ending : tiff_endings) longest = std::max(longest, ending_length(name, ending));
  return longest;
}

std::string companion_text(const std::filesystem::path& file) {
  constexpr std::uintmax_t largest = std::uintmax_t{256} << 20U;
  std::error_code error;
  const auto bytes = std::filesystem::file_size(file, error);
  std::ifstream stream(file, std::ios::binary);
  if (error || !stream || bytes > largest) {
    throw Problem("The file " + file.filename().string() +
                  " cannot be read as OME-XML; check its size and that it may be read.");
  }
  std::ostringstream text;
  text << stream.rdbuf();
  return text.str();
}

}  // namespace

std::string acquisition_name(const std::string& file_name) {
  const auto ending =
      std::max(tiff_ending_length(file_name), ending_length(file_name, companion_ending));
  return file_name.substr(0, file_name.size() - ending);
}

bool is_tiff_name(const std::string& file_name) {
  return !file_name.starts_with('.') && tiff_ending_length(file_name) > 0;
}

bool is_companion_name(const std::string& file_name) {
  return !file_name.starts_with('.') && ending_length(file_name, companion_ending) > 0;
}

std::vector<std::filesystem::path> frame_files(const std::filesystem::path& folder) {
  std::error_code error;
  std::filesystem::directory_iterator entries(folder, error);
  if (error) {
    throw Problem("The folder " + folder.filename().string() +
                  " cannot be read: " + error.message() + ".");
  }
  std::vector<std::filesystem::path> files;
  for (const auto& entry : entries) {
    std::error_code ignored;
    if (is_tiff_name(entry.path().filename().string()) && entry.is_regular_file(ignored)) {
      files.push_back(entry.path());
    }
  }
  std::sort(files.begin(), files.end(), [](const auto& left, const auto& right) {
    return natural_less(left.filename().string(), right.filename().string());
  });
  return files;
}

OmeMetadata ome_of(const std::filesystem::path& file) {
  const std::string name = file.filename().string();
  return parse_ome(is_companion_name(name) ? companion_text(file) : first_description(file), name);
}

}  // namespace wavefount
