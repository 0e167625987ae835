#pragma once

#include <itkCreateObjectFunction.h>
#include <itkObjectFactoryBase.h>
#include <itkVersion.h>

#include <string>

#include "wavefount/core/step.h"
#include "wavefount/core/version.h"

namespace wavefount {

/// The object factory of one plug-in. WAVEFOUNT_PLUGIN below makes one, adds the steps and writes
/// the two symbols that the loader looks for.
class PluginFactory : public itk::ObjectFactoryBase {
 public:
  using Self = PluginFactory;
  using Pointer = itk::SmartPointer<Self>;
  itkTypeMacro(PluginFactory, itk::ObjectFactoryBase);

  static Pointer New(const std::string& description);
  const char* GetITKSourceVersion() const override { return ITK_SOURCE_VERSION; }
  const char* GetDescription() const override { return description_.c_str(); }

  /// Registers StepType under the name that its declaration gives.
  template <class StepType>
  void add() {
    const auto step = StepType::New();
    const auto name = step->declaration().name;
    this->RegisterOverride(name.c_str(), name.c_str(), step->declaration().sentence.c_str(), true,
                           itk::CreateObjectFunction<StepType>::New());
  }

 protected:
  explicit PluginFactory(std::string description);
  ~PluginFactory() override;

 private:
  std::string description_;
};

}  // namespace wavefount

namespace wavefount {
template <class... Steps>
struct StepList {};

template <class... Steps>
PluginFactory::Pointer make_factory(const char* description, StepList<Steps...> /*steps*/) {
  auto factory = PluginFactory::New(description);
  (factory->template add<Steps>(), ...);
  return factory;
}
}  // namespace wavefount

#define WAVEFOUNT_EXPORT __attribute__((visibility("default")))

/// Writes the two symbols that a plug-in exports: `wavefount_abi`, which the loader compares before
/// it calls anything, and `itkLoad()`. `description` is a sentence; the rest are step classes
/// derived from FrameStep, AcquisitionStep or FolderStep, with itkFactorylessNewMacro.
#define WAVEFOUNT_PLUGIN(description, ...)                                        \
  extern "C" {                                                                    \
  WAVEFOUNT_EXPORT extern const char wavefount_abi[];                             \
  const char wavefount_abi[] = WAVEFOUNT_ABI;                                     \
  WAVEFOUNT_EXPORT itk::ObjectFactoryBase* itkLoad();                             \
  itk::ObjectFactoryBase* itkLoad() {                                             \
    static const auto factory =                                                   \
        wavefount::make_factory(description, wavefount::StepList<__VA_ARGS__>()); \
    return factory.GetPointer();                                                  \
  }                                                                               \
  }
