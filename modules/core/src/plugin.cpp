#include "wavefount/core/plugin.h"

#include <utility>

namespace wavefount {

PluginFactory::PluginFactory(std::string description) : description_(std::move(description)) {}

PluginFactory::~PluginFactory() = default;

PluginFactory::Pointer PluginFactory::New(const std::string& description) {
  Pointer made = new PluginFactory(description);
  made->UnRegister();
  return made;
}

}  // namespace wavefount
