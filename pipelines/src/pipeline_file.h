#pragma once

#include <cstdint>
#include <filesystem>
#include <map>
#include <string>
#include <vector>

namespace wavefount {

/// One step as a pipeline file names it.
struct DeclaredStep {
  std::string name;
  std::map<std::string, std::string> parameters;  ///< as written
  int line = 0;                                   ///< in the file, from 1
};

/// A pipeline file: name, imaging channels, seed and steps.
struct PipelineFile {
  std::filesystem::path path;
  std::string text;  ///< the whole file, for the record
  std::string name;
  std::string about;
  std::string reporter, brightfield, field;  ///< imaging-channel names or numbers; empty: not used
  std::uint64_t seed = 1;
  std::vector<DeclaredStep> steps;
};

/// Reads a pipeline file. Throws Problem with line and column for broken YAML, an unknown key or a
/// wrong kind of value.
PipelineFile read_pipeline_file(const std::filesystem::path& path);

}  // namespace wavefount
