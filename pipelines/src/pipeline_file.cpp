#include "pipeline_file.h"

#include <yaml-cpp/yaml.h>

#include <fstream>
#include <sstream>

#include "step_registry.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

/// A pipeline is a page of text; more is not a pipeline but a way to eat memory.
constexpr std::uintmax_t largest_file = 1 << 20;

[[noreturn]] void refuse(const std::filesystem::path& path, const YAML::Mark& mark,
                         const std::string& what) {
  throw Problem("The pipeline " + path.string() + ", line " + std::to_string(mark.line + 1) +
                ", column " + std::to_string(mark.column + 1) + ": " + what);
}

std::string read_text(const std::filesystem::path& path) {
  std::error_code error;
  if (!std::filesystem::is_regular_file(path, error))
    throw Problem("There is no pipeline file " + path.string() +
                  "; give the path of a .yaml file.");
  if (std::filesystem::file_size(path, error) > largest_file || error)
    throw Problem("The pipeline " + path.string() + " is larger than 1 MiB; it is no pipeline.");
  std::ifstream in(path, std::ios::binary);
  std::ostringstream text;
  if (!(text << in.rdbuf()))
    throw Problem("The pipeline " + path.string() + " cannot be read or is empty.");
  return text.str();
}

std::string scalar(const std::filesystem::path& path, const std::string& key,
                   const YAML::Node& value) {
  if (!value.IsScalar()) refuse(path, value.Mark(), "'" + key + "' takes a single value.");
  return value.Scalar();
}

DeclaredStep read_step(const std::filesystem::path& path, const YAML::Node& node) {
  DeclaredStep step;
  step.line = node.Mark().line + 1;
  if (node.IsScalar()) {
    step.name = node.Scalar();
    return step;
  }
  if (!node.IsMap() || node.size() != 1 || !node.begin()->first.IsScalar())
    refuse(path, node.Mark(), "a step is its name, or its name, a colon and its parameters.");
  step.name = node.begin()->first.Scalar();
  const YAML::Node parameters = node.begin()->second;
  if (parameters.IsNull()) return step;
  if (!parameters.IsMap())
    refuse(path, parameters.Mark(),
           "the parameters of '" + step.name + "' are 'name: value' lines.");
  for (const auto& parameter : parameters) {
    const auto name = scalar(path, "parameter name", parameter.first);
    if (!step.parameters.emplace(name, scalar(path, name, parameter.second)).second)
      refuse(path, parameter.first.Mark(), "the parameter '" + name + "' stands twice.");
  }
  return step;
}

void read_channels(PipelineFile& pipeline, const YAML::Node& node) {
  if (!node.IsMap())
    refuse(pipeline.path, node.Mark(), "'channels' takes lines such as 'reporter: 1'.");
  const std::map<std::string, std::string*> roles = {{"reporter", &pipeline.reporter},
                                                     {"brightfield", &pipeline.brightfield},
                                                     {"field", &pipeline.field}};
  for (const auto& channel : node) {
    const auto role = scalar(pipeline.path, "channel role", channel.first);
    const auto at = roles.find(role);
    if (at == roles.end())
      refuse(pipeline.path, channel.first.Mark(),
             "there is no channel role '" + role + "'; known are reporter, brightfield and field.");
    *at->second = scalar(pipeline.path, role, channel.second);
  }
}

void read_steps(PipelineFile& pipeline, const YAML::Node& node) {
  if (!node.IsSequence() || node.size() == 0)
    refuse(pipeline.path, node.Mark(), "'steps' takes a list, one '- step' a line.");
  for (const auto& step : node) pipeline.steps.push_back(read_step(pipeline.path, step));
}

void read_key(PipelineFile& pipeline, const YAML::Node& key_node, const YAML::Node& value) {
  const auto key = scalar(pipeline.path, "key", key_node);
  if (key == "pipeline") {
    pipeline.name = scalar(pipeline.path, key, value);
  } else if (key == "about") {
    pipeline.about = scalar(pipeline.path, key, value);
  } else if (key == "channels") {
    read_channels(pipeline, value);
  } else if (key == "steps") {
    read_steps(pipeline, value);
  } else if (key == "seed") {
    const auto seed = parse_integer(scalar(pipeline.path, key, value));
    if (!seed || *seed < 0) refuse(pipeline.path, value.Mark(), "'seed' takes a whole number.");
    pipeline.seed = static_cast<std::uint64_t>(*seed);
  } else {
    const auto near = nearest_word(key, {"pipeline", "about", "channels", "steps", "seed"});
    refuse(pipeline.path, key_node.Mark(),
           "there is no key '" + key + "'" +
               (near.empty() ? "; known are pipeline, about, channels, seed and steps."
                             : "; did you mean '" + near + "'?"));
  }
}

}  // namespace

PipelineFile read_pipeline_file(const std::filesystem::path& path) {
  PipelineFile pipeline;
  pipeline.path = path;
  pipeline.text = read_text(path);
  try {
    const YAML::Node root = YAML::Load(pipeline.text);
    if (!root.IsMap())
      refuse(path, root.Mark(), "a pipeline holds 'key: value' lines, 'steps' among them.");
    for (const auto& entry : root) read_key(pipeline, entry.first, entry.second);
  } catch (const YAML::Exception& error) {
    refuse(path, error.mark, "this is not valid YAML (" + error.msg + ").");
  }
  if (pipeline.steps.empty())
    throw Problem("The pipeline " + path.string() + " names no steps; add a 'steps:' list.");
  if (pipeline.name.empty()) pipeline.name = path.stem().string();
  return pipeline;
}

}  // namespace wavefount
