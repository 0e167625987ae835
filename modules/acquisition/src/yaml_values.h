#pragma once

#include <yaml-cpp/yaml.h>

#include <filesystem>
#include <string>
#include <vector>

#include "wavefount/core/film.h"

namespace wavefount {

/// One value of a sidecar, with what a message about it needs.
struct YamlValue {
  std::string file;  ///< name of the sidecar
  std::string key;
  YAML::Node node;
  int line = 0;  ///< from 1

  /// Throws Problem: file, line, key, what the value must be.
  [[noreturn]] void refuse(const std::string& must_be) const;
  YamlValue item(const YAML::Node& inner) const {
    return {file, key, inner, inner.Mark().line + 1};
  }
};

/// Loads a YAML file of at most 4 MiB. Throws Problem with line and column.
YAML::Node load_yaml(const std::filesystem::path& file);

/// These throw Problem where the value is of another kind or out of range.
double number_of(const YamlValue& value, double lowest, double highest, const char* must_be);
int integer_of(const YamlValue& value, int lowest, int highest, const char* must_be);
std::string word_of(const YamlValue& value, const std::vector<std::string>& words);
std::string text_of(const YamlValue& value, const char* must_be);
std::vector<YamlValue> list_of(const YamlValue& value, const char* must_be);
Polygon polygon_of(const YamlValue& value);
/// A list of polygons, or a single one.
std::vector<Polygon> polygons_of(const YamlValue& value);

}  // namespace wavefount
