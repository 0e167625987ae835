#include "ome_files.h"

#include <algorithm>

namespace wavefount {
namespace {

/// A name that points outside the film's folder is not followed.
bool stays_inside(const std::filesystem::path& name) {
  const auto normal = name.lexically_normal();
  return !normal.empty() && !normal.is_absolute() && *normal.begin() != "..";
}

}  // namespace

OmeFiles::OmeFiles(const OmeMetadata& metadata, const std::filesystem::path& own)
    : own_(own), uuid_(metadata.uuid) {
  std::set<std::string> names;
  for (const auto& series : metadata.series) {
    for (const auto& block : series.blocks) names.insert(block.file_name);
  }
  renamed_ = names.size() == 1 && !names.count("") && !names.count(own.filename().string());
  std::set<std::filesystem::path> seen;
  for (const auto& series : metadata.series) {
    if (series.blocks.empty() && seen.insert(own_).second) all_.push_back(own_);
    for (const auto& block : series.blocks) {
      const auto file = file_of(block);
      if (!file.empty() && seen.insert(file).second) all_.push_back(file);
    }
  }
}

std::filesystem::path OmeFiles::file_of(const OmeBlock& block) const {
  const bool is_own = block.file_name.empty() || (!block.uuid.empty() && block.uuid == uuid_);
  if (is_own || renamed_) return own_;
  if (!stays_inside(block.file_name)) return {};
  return own_.parent_path() / std::filesystem::path(block.file_name).lexically_normal();
}

}  // namespace wavefount
