#include "step_registry.h"

#include <dlfcn.h>
#include <itkObjectFactoryBase.h>

#include <algorithm>
#include <cstdlib>
#include <numeric>

#include "shared_object_check.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"
#include "wavefount/core/version.h"

namespace wavefount {
namespace {

using LoadFunction = itk::ObjectFactoryBase* (*)();

std::vector<std::string> override_names(itk::ObjectFactoryBase& factory) {
  const auto listed = factory.GetClassOverrideNames();
  return {listed.begin(), listed.end()};
}

/// dlerror() starts with the library's path, which the refusal names already.
std::string loader_words() {
  const char* words = dlerror();
  return words == nullptr ? "the system does not say why" : words;
}

int edit_distance(const std::string& left, const std::string& right) {
  std::vector<int> row(right.size() + 1);
  std::iota(row.begin(), row.end(), 0);
  for (std::size_t i = 1; i <= left.size(); ++i) {
    int diagonal = row[0];
    row[0] = static_cast<int>(i);
    for (std::size_t j = 1; j <= right.size(); ++j) {
      const int replaced = diagonal + (left[i - 1] == right[j - 1] ? 0 : 1);
      diagonal = row[j];
      row[j] = std::min({row[j] + 1, row[j - 1] + 1, replaced});
    }
  }
  return row.back();
}

std::vector<std::filesystem::path> libraries_in(const std::filesystem::path& folder) {
  std::vector<std::filesystem::path> libraries;
  for (const auto& entry : std::filesystem::directory_iterator(folder)) {
    if (entry.path().extension() == ".so") libraries.push_back(entry.path());
  }
  std::sort(libraries.begin(), libraries.end());
  return libraries;
}

/// itkLoad() may come from anyone: whatever it throws becomes a sentence.
itk::ObjectFactoryBase* guarded_load(LoadFunction load, std::string& fault) {
  try {
    auto* factory = load();
    if (factory == nullptr) fault = "its itkLoad() gives no factory";
    return factory;
  } catch (const std::exception& error) {
    fault = std::string("its itkLoad() failed: ") + error.what();
  } catch (...) {
    fault = "its itkLoad() failed";
  }
  return nullptr;
}

}  // namespace

bool StepRegistry::refuse(const std::filesystem::path& library, const std::string& why) {
  refusals_.push_back("The plug-in " + library.string() + " was left out: " + why + ".");
  return false;
}

void StepRegistry::open_folders(const std::vector<std::filesystem::path>& folders) {
  for (const auto& folder : folders) {
    std::error_code error;
    if (!std::filesystem::is_directory(folder, error)) {
      refusals_.push_back("The plug-in folder " + folder.string() +
                          " does not exist; correct --plugins or WAVEFOUNT_PLUGINS.");
      continue;
    }
    try {
      for (const auto& library : libraries_in(folder)) open(library);
    } catch (const std::filesystem::filesystem_error&) {
      refusals_.push_back("The plug-in folder " + folder.string() +
                          " cannot be read; check its permissions.");
    }
  }
}

bool StepRegistry::open(const std::filesystem::path& library) {
  if (const auto fault = fault_of_shared_object(library)) return refuse(library, *fault);
  void* handle = dlopen(library.c_str(), RTLD_NOW | RTLD_LOCAL);
  if (handle == nullptr) return refuse(library, "it cannot be loaded (" + loader_words() + ")");
  const auto* abi = static_cast<const char*>(dlsym(handle, "wavefount_abi"));
  if (abi == nullptr) return refuse(library, "it does not state its version (wavefount_abi)");
  if (std::string(abi) != WAVEFOUNT_ABI)
    return refuse(library, "it was built for '" + std::string(abi).substr(0, 80) +
                               "', this program is '" WAVEFOUNT_ABI "'; build it again");
  const auto load = reinterpret_cast<LoadFunction>(dlsym(handle, "itkLoad"));
  if (load == nullptr) return refuse(library, "it has no itkLoad()");
  std::string fault;
  auto* factory = guarded_load(load, fault);
  if (factory == nullptr) return refuse(library, fault);
  const auto names = override_names(*factory);
  if (names.empty()) return refuse(library, "it registers no step");
  for (const auto& name : names) {
    if (knows(name))
      return refuse(library, "the step name '" + name + "' is taken by " + steps_[name].string());
    if (std::count(names.begin(), names.end(), name) > 1)
      return refuse(library, "it registers the step name '" + name + "' twice");
  }
  itk::ObjectFactoryBase::RegisterFactory(factory);
  for (const auto& name : names) steps_[name] = library;
  return true;
}

std::vector<std::string> StepRegistry::names() const {
  std::vector<std::string> names;
  for (const auto& [name, library] : steps_) names.push_back(name);
  return names;
}

Step::Pointer StepRegistry::make(const std::string& name) const {
  if (!knows(name)) {
    const auto near = nearest_word(name, names());
    throw Problem("There is no step '" + name + "'" +
                  (near.empty() ? std::string() : "; did you mean '" + near + "'?") +
                  " (`wavefount steps` lists all).");
  }
  auto object = itk::ObjectFactoryBase::CreateInstance(name.c_str());
  if (object.IsNull()) throw Problem("The step '" + name + "' could not be made by its plug-in.");
  // ITK hands the object over with one reference more than the pointers that hold it.
  object->UnRegister();
  auto* step = dynamic_cast<Step*>(object.GetPointer());
  if (step == nullptr) throw Problem("What the plug-in registered as '" + name + "' is no step.");
  return step;
}

const std::filesystem::path& StepRegistry::library_of(const std::string& name) const {
  return steps_.at(name);
}

std::vector<std::filesystem::path> plugin_folders(const std::vector<std::filesystem::path>& more) {
  std::vector<std::filesystem::path> folders;
  const auto program = std::filesystem::read_symlink("/proc/self/exe").parent_path();
  for (const char* relative : {WAVEFOUNT_PLUGIN_FOLDER, "../lib/wavefount/plugins"}) {
    const auto folder = (program / relative).lexically_normal();
    if (std::filesystem::is_directory(folder)) {
      folders.push_back(folder);
      break;
    }
  }
  if (const char* listed = std::getenv("WAVEFOUNT_PLUGINS")) {
    for (const auto& folder : split(listed, ':')) {
      if (!folder.empty()) folders.emplace_back(folder);
    }
  }
  folders.insert(folders.end(), more.begin(), more.end());
  return folders;
}

std::string nearest_word(const std::string& word, const std::vector<std::string>& known) {
  std::string nearest;
  // More than a third of the letters wrong is another word, not a slip.
  int allowed = std::max(2, static_cast<int>(word.size()) / 3);
  for (const auto& candidate : known) {
    const int distance = edit_distance(word, candidate);
    if (distance > allowed) continue;
    allowed = distance - 1;
    nearest = candidate;
  }
  return nearest;
}

}  // namespace wavefount
