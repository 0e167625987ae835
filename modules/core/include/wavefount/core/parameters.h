#pragma once

#include <map>
#include <optional>
#include <string>
#include <vector>

namespace wavefount {

enum class ParameterKind { number, integer, yes_no, choice, text };

/// One parameter of a step, declared once: help, schema, check and README come out of it.
struct ParameterDeclaration {
  std::string name;
  ParameterKind kind = ParameterKind::number;
  std::string unit;              ///< "um", "min", "1/min", "1" for a pure number, "" for text
  std::optional<double> lowest;  ///< inclusive
  std::optional<double> highest;
  std::string default_text;  ///< as written in YAML; empty: taken from the data
  std::vector<std::string> choices;
  std::string sentence;  ///< what it does and why the default
};

/// The parameters of one step as used: every declared one is present; one left to the data is
/// empty.
class Parameters {
 public:
  Parameters() = default;
  /// `given`: as written in the pipeline. Throws Problem for an unknown name, a value of the wrong
  /// kind, out of range, or not among the choices.
  Parameters(const std::vector<ParameterDeclaration>& declared,
             const std::map<std::string, std::string>& given);

  double number(const std::string& name) const;
  int integer(const std::string& name) const;
  bool yes(const std::string& name) const;
  std::string text(const std::string& name) const;
  /// Empty when left to the data.
  std::optional<double> optional_number(const std::string& name) const;
  const std::map<std::string, std::string>& all() const { return values_; }

 private:
  const std::string& value(const std::string& name) const;

  std::map<std::string, std::string> values_;
};

}  // namespace wavefount
