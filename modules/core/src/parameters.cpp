#include "wavefount/core/parameters.h"

#include <algorithm>

#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

std::string range_text(const ParameterDeclaration& declared) {
  const auto end = [](const std::optional<double>& limit) {
    return limit ? rounded_text(*limit) : std::string("any");
  };
  const auto unit = declared.unit.empty() || declared.unit == "1" ? "" : " " + declared.unit;
  return end(declared.lowest) + " to " + end(declared.highest) + unit;
}

[[noreturn]] void refuse(const ParameterDeclaration& declared, const std::string& text,
                         const std::string& wanted) {
  throw Problem("The parameter '" + declared.name + "' is '" + text + "'; it takes " + wanted +
                ".");
}

void check_range(const ParameterDeclaration& declared, const std::string& text, double value) {
  const bool low = declared.lowest && value < *declared.lowest;
  const bool high = declared.highest && value > *declared.highest;
  if (low || high) refuse(declared, text, range_text(declared));
}

void check_value(const ParameterDeclaration& declared, const std::string& text) {
  switch (declared.kind) {
    case ParameterKind::number: {
      const auto value = parse_number(text);
      if (!value) refuse(declared, text, "a number, " + range_text(declared));
      return check_range(declared, text, *value);
    }
    case ParameterKind::integer: {
      const auto value = parse_integer(text);
      if (!value) refuse(declared, text, "a whole number, " + range_text(declared));
      return check_range(declared, text, static_cast<double>(*value));
    }
    case ParameterKind::yes_no:
      if (text != "yes" && text != "no" && text != "true" && text != "false")
        refuse(declared, text, "yes or no");
      return;
    case ParameterKind::choice:
      if (std::find(declared.choices.begin(), declared.choices.end(), text) ==
          declared.choices.end())
        refuse(declared, text, "one of: " + joined(declared.choices, ", "));
      return;
    case ParameterKind::text:
      return;
  }
}

}  // namespace

Parameters::Parameters(const std::vector<ParameterDeclaration>& declared,
                       const std::map<std::string, std::string>& given) {
  for (const auto& one : declared) values_[one.name] = one.default_text;
  for (const auto& [name, text] : given) {
    const auto at = std::find_if(declared.begin(), declared.end(),
                                 [&](const auto& one) { return one.name == name; });
    if (at == declared.end()) {
      std::vector<std::string> known;
      for (const auto& one : declared) known.push_back(one.name);
      throw Problem("There is no parameter '" + name + "'; " +
                    (known.empty() ? std::string("this step takes none.")
                                   : "known are: " + joined(known, ", ") + "."));
    }
    check_value(*at, text);
    values_[name] = text;
  }
}

const std::string& Parameters::value(const std::string& name) const {
  const auto at = values_.find(name);
  if (at == values_.end()) throw Problem("The step did not declare the parameter '" + name + "'.");
  return at->second;
}

double Parameters::number(const std::string& name) const {
  const auto number = optional_number(name);
  if (!number) throw Problem("The parameter '" + name + "' has no value.");
  return *number;
}

int Parameters::integer(const std::string& name) const {
  return static_cast<int>(number(name));
}

bool Parameters::yes(const std::string& name) const {
  return value(name) == "yes" || value(name) == "true";
}

std::string Parameters::text(const std::string& name) const {
  return value(name);
}

std::optional<double> Parameters::optional_number(const std::string& name) const {
  const auto& text = value(name);
  return text.empty() ? std::nullopt : parse_number(text);
}

}  // namespace wavefount
