#pragma once

#include <filesystem>
#include <map>
#include <string>
#include <vector>

#include "wavefount/core/step.h"

namespace wavefount {

/// Opens plug-ins and makes the steps they registered in ITK's object factory. Plug-ins stay open
/// until the program ends. One registry a process, since ITK's factory list is the process' own.
class StepRegistry {
 public:
  /// Opens every `*.so` of each folder, in order of name. A bad library is refused with a sentence
  /// in refusals(); the others still load. A folder that is missing is refused likewise.
  void open_folders(const std::vector<std::filesystem::path>& folders);
  /// Opens one library; false and a sentence in refusals() when it is not a good plug-in.
  bool open(const std::filesystem::path& library);

  const std::vector<std::string>& refusals() const { return refusals_; }
  /// Names of all steps, in alphabetical order.
  std::vector<std::string> names() const;
  bool knows(const std::string& name) const { return steps_.contains(name); }
  /// A new step. Throws Problem for an unknown name (naming the nearest known one).
  Step::Pointer make(const std::string& name) const;
  /// The library that a step comes from.
  const std::filesystem::path& library_of(const std::string& name) const;

 private:
  bool refuse(const std::filesystem::path& library, const std::string& why);

  std::map<std::string, std::filesystem::path> steps_;
  std::vector<std::string> refusals_;
};

/// Where plug-ins are looked for: those beside the program, the folders of the environment variable
/// WAVEFOUNT_PLUGINS (separated by colons), and `more`.
std::vector<std::filesystem::path> plugin_folders(const std::vector<std::filesystem::path>& more);

/// The known word nearest to `word` by edit distance, empty when none is near.
std::string nearest_word(const std::string& word, const std::vector<std::string>& known);

}  // namespace wavefount
