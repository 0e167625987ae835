#include "step_catalogue.h"

#include <nlohmann/json.hpp>

#include "wavefount/core/text.h"

namespace wavefount {
namespace {

using Json = nlohmann::ordered_json;

const char* scope_name(Scope scope) {
  switch (scope) {
    case Scope::frame:
      return "frame";
    case Scope::acquisition:
      return "acquisition";
    case Scope::folder:
      return "folder";
  }
  return "";
}

const char* kind_name(ParameterKind kind) {
  switch (kind) {
    case ParameterKind::number:
      return "number";
    case ParameterKind::integer:
      return "whole number";
    case ParameterKind::yes_no:
      return "yes or no";
    case ParameterKind::choice:
      return "choice";
    case ParameterKind::text:
      return "text";
  }
  return "";
}

std::vector<StepDeclaration> declarations(const StepRegistry& registry,
                                          const std::vector<std::string>& only) {
  std::vector<StepDeclaration> list;
  for (const auto& name : only.empty() ? registry.names() : only)
    list.push_back(registry.make(name)->declaration());
  return list;
}

std::string unit_text(const ParameterDeclaration& parameter) {
  return parameter.unit == "1" ? "" : parameter.unit;
}

std::string range_of(const ParameterDeclaration& parameter) {
  if (!parameter.choices.empty()) return joined(parameter.choices, " | ");
  if (!parameter.lowest && !parameter.highest) return kind_name(parameter.kind);
  const auto limit = [](const std::optional<double>& value) {
    return value ? number_text(*value) : std::string("any");
  };
  const auto unit = unit_text(parameter);
  return limit(parameter.lowest) + " to " + limit(parameter.highest) +
         (unit.empty() ? "" : " " + unit);
}

std::string default_of(const ParameterDeclaration& parameter) {
  return parameter.default_text.empty() ? "from the data" : parameter.default_text;
}

Json parameter_json(const ParameterDeclaration& parameter) {
  Json json = {{"name", parameter.name}, {"kind", kind_name(parameter.kind)}};
  if (!parameter.unit.empty()) json["unit"] = parameter.unit;
  if (parameter.lowest) json["lowest"] = *parameter.lowest;
  if (parameter.highest) json["highest"] = *parameter.highest;
  if (!parameter.choices.empty()) json["choices"] = parameter.choices;
  json["default"] = parameter.default_text.empty() ? Json(nullptr) : Json(parameter.default_text);
  json["sentence"] = parameter.sentence;
  return json;
}

Json parameter_schema(const ParameterDeclaration& parameter) {
  Json json = {{"description", parameter.sentence}};
  switch (parameter.kind) {
    case ParameterKind::number:
      json["type"] = "number";
      break;
    case ParameterKind::integer:
      json["type"] = "integer";
      break;
    case ParameterKind::yes_no:
      json["enum"] = {"yes", "no", true, false};
      break;
    case ParameterKind::choice:
      json["enum"] = parameter.choices;
      break;
    case ParameterKind::text:
      json["type"] = {"string", "number"};
      break;
  }
  if (parameter.lowest) json["minimum"] = *parameter.lowest;
  if (parameter.highest) json["maximum"] = *parameter.highest;
  return json;
}

Json step_schema(const StepDeclaration& step) {
  Json properties = Json::object();
  for (const auto& parameter : step.parameters)
    properties[parameter.name] = parameter_schema(parameter);
  const Json parameters = {
      {"type", {"object", "null"}}, {"additionalProperties", false}, {"properties", properties}};
  return {{"description", step.sentence},
          {"anyOf",
           {{{"const", step.name}},
            {{"type", "object"},
             {"additionalProperties", false},
             {"required", {step.name}},
             {"properties", {{step.name, parameters}}}}}}};
}

void add_step_text(std::string& text, const StepDeclaration& step) {
  const auto list = [](const std::vector<std::string>& names) {
    return names.empty() ? std::string("nothing") : joined(names, ", ");
  };
  text += step.name + "  (" + scope_name(step.scope) + ")\n  " + step.sentence + "\n  needs " +
          list(step.needs) + "; makes " + list(step.makes) + "\n";
  for (const auto& parameter : step.parameters)
    text += "    " + parameter.name + "  [" + range_of(parameter) + "; default " +
            default_of(parameter) + "]\n      " + parameter.sentence + "\n";
  text += "\n";
}

}  // namespace

std::string steps_as_text(const StepRegistry& registry, const std::vector<std::string>& only) {
  std::string text;
  for (const auto& step : declarations(registry, only)) add_step_text(text, step);
  return text;
}

std::string steps_as_json(const StepRegistry& registry, const std::vector<std::string>& only) {
  Json list = Json::array();
  for (const auto& step : declarations(registry, only)) {
    Json parameters = Json::array();
    for (const auto& parameter : step.parameters) parameters.push_back(parameter_json(parameter));
    list.push_back({{"step", step.name},
                    {"sentence", step.sentence},
                    {"scope", scope_name(step.scope)},
                    {"needs", step.needs},
                    {"makes", step.makes},
                    {"parameters", parameters}});
  }
  return list.dump(2) + "\n";
}

std::string pipeline_schema(const StepRegistry& registry) {
  Json steps = Json::array();
  for (const auto& step : declarations(registry, {})) steps.push_back(step_schema(step));
  const Json channel = {{"type", {"string", "integer"}}};
  const Json schema = {
      {"$schema", "https://json-schema.org/draft/2020-12/schema"},
      {"title", "Wavefount pipeline"},
      {"type", "object"},
      {"additionalProperties", false},
      {"required", {"steps"}},
      {"properties",
       {{"pipeline", {{"type", "string"}}},
        {"about", {{"type", "string"}}},
        {"seed", {{"type", "integer"}, {"minimum", 0}}},
        {"channels",
         {{"type", "object"},
          {"additionalProperties", false},
          {"properties", {{"reporter", channel}, {"brightfield", channel}, {"field", channel}}}}},
        {"steps", {{"type", "array"}, {"minItems", 1}, {"items", {{"oneOf", steps}}}}}}}};
  return schema.dump(2) + "\n";
}

std::string steps_as_markdown(const StepRegistry& registry) {
  std::string text =
      "| step | scope | needs | makes | parameters | what it does |\n"
      "|---|---|---|---|---|---|\n";
  for (const auto& step : declarations(registry, {})) {
    std::vector<std::string> parameters;
    for (const auto& parameter : step.parameters) parameters.push_back("`" + parameter.name + "`");
    text += "| `" + step.name + "` | " + scope_name(step.scope) + " | " + joined(step.needs, ", ") +
            " | " + joined(step.makes, ", ") + " | " + joined(parameters, ", ") + " | " +
            step.sentence + " |\n";
  }
  return text;
}

}  // namespace wavefount
