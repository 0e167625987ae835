#include "yaml_values.h"

#include <algorithm>
#include <fstream>
#include <sstream>

#include "utf8.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

constexpr std::uintmax_t largest_yaml = std::uintmax_t{4} << 20U;
constexpr double farthest_um = 1e7;

constexpr const char* polygon_form =
    "a polygon: a list of at least three points in µm, as in [[0, 0], [900, 0], [900, 120]]";

std::string shown(const YAML::Node& node) {
  if (node.IsScalar()) return in_quotes(node.Scalar());
  if (node.IsSequence()) return "a list";
  return node.IsMap() ? "a group of keys" : "empty";
}

Point point_of(const YamlValue& value) {
  if (!value.node.IsSequence() || value.node.size() != 2) value.refuse(polygon_form);
  return {number_of(value.item(value.node[0]), -farthest_um, farthest_um, polygon_form),
          number_of(value.item(value.node[1]), -farthest_um, farthest_um, polygon_form)};
}

}  // namespace

void YamlValue::refuse(const std::string& must_be) const {
  throw Problem("The sidecar " + file + ", line " + std::to_string(line) + ", gives " +
                shown(node) + " for " + key + ", which must be " + must_be + ".");
}

YAML::Node load_yaml(const std::filesystem::path& file) {
  const std::string name = file.filename().string();
  std::error_code error;
  const auto bytes = std::filesystem::file_size(file, error);
  if (error || !std::filesystem::is_regular_file(file)) {
    throw Problem("The sidecar " + name + " cannot be read; check that it is a file.");
  }
  if (bytes > largest_yaml) {
    throw Problem("The sidecar " + name +
                  " is larger than 4 MiB; put long lists of times into a times_file.");
  }
  std::ifstream stream(file, std::ios::binary);
  std::ostringstream text;
  text << stream.rdbuf();
  try {
    return YAML::Load(text.str());
  } catch (const YAML::Exception& problem) {
    throw Problem("The sidecar " + name + ", line " + std::to_string(problem.mark.line + 1) +
                  ", column " + std::to_string(problem.mark.column + 1) +
                  ", is not YAML: " + problem.msg + ".");
  }
}

double number_of(const YamlValue& value, double lowest, double highest, const char* must_be) {
  const auto number =
      value.node.IsScalar() ? parse_number(value.node.Scalar()) : std::optional<double>();
  if (!number || !(*number >= lowest && *number <= highest)) value.refuse(must_be);
  return *number;
}

int integer_of(const YamlValue& value, int lowest, int highest, const char* must_be) {
  const auto number =
      value.node.IsScalar() ? parse_integer(value.node.Scalar()) : std::optional<long long>();
  if (!number || *number < lowest || *number > highest) value.refuse(must_be);
  return static_cast<int>(*number);
}

std::string word_of(const YamlValue& value, const std::vector<std::string>& words) {
  const std::string word = value.node.IsScalar() ? lower_case(value.node.Scalar()) : "";
  if (std::find(words.begin(), words.end(), word) == words.end()) {
    value.refuse(joined(words, " or "));
  }
  return word;
}

std::string text_of(const YamlValue& value, const char* must_be) {
  if (!value.node.IsScalar() || trimmed(value.node.Scalar()).empty()) value.refuse(must_be);
  return trimmed(value.node.Scalar());
}

std::vector<YamlValue> list_of(const YamlValue& value, const char* must_be) {
  if (!value.node.IsSequence() || value.node.size() == 0) value.refuse(must_be);
  std::vector<YamlValue> items;
  for (const auto& inner : value.node) items.push_back(value.item(inner));
  return items;
}

Polygon polygon_of(const YamlValue& value) {
  Polygon polygon;
  for (const auto& item : list_of(value, polygon_form)) polygon.push_back(point_of(item));
  if (polygon.size() < 3) value.refuse(polygon_form);
  return polygon;
}

std::vector<Polygon> polygons_of(const YamlValue& value) {
  const auto items = list_of(value, polygon_form);
  const auto& first = items.front().node;
  if (first.IsSequence() && first.size() > 0 && first[0].IsScalar()) return {polygon_of(value)};
  std::vector<Polygon> polygons;
  for (const auto& item : items) polygons.push_back(polygon_of(item));
  return polygons;
}

}  // namespace wavefount
