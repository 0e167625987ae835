#pragma once

#include <itkCreateObjectFunction.h>
#include <itkObjectFactoryBase.h>
#include <itkVersion.h>

#include <string>

#include "wavefount/core/step.h"
#include "wavefount/core/version.h"

namespace wavefount {

/// The object factory of one plug-in: give it the steps, and `itkLoad()` is done.
///
///   extern "C" WAVEFOUNT_EXPORT const char* wavefount_abi() { return WAVEFOUNT_ABI; }
///   extern "C" WAVEFOUNT_EXPORT itk::ObjectFactoryBase* itkLoad() { ... }
///
/// WAVEFOUNT_PLUGIN(factory_name, steps...) below writes both.
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

#define WAVEFOUNT_EXPORT __attribute__((visibility("default")))

/// Writes the two functions that a plug-in exports. `description` is a sentence; the rest are step
/// classes derived from FrameStep, AcquisitionStep or FolderStep with itkSimpleNewMacro.
#define WAVEFOUNT_PLUGIN(description, ...)                          \
  extern "C" WAVEFOUNT_EXPORT const char* wavefount_abi() {         \
    return WAVEFOUNT_ABI;                                           \
  }                                                                 \
  extern "C" WAVEFOUNT_EXPORT itk::ObjectFactoryBase* itkLoad() {   \
    static const auto factory = [] {                                \
      const auto made = wavefount::PluginFactory::New(description); \
      [&]<class... Steps>(wavefount::StepList<Steps...>) {          \
        (made->template add<Steps>(), ...);                         \
      }(wavefount::StepList<__VA_ARGS__>());                        \
      return made;                                                  \
    }();                                                            \
    return factory.GetPointer();                                    \
  }

namespace wavefount {
template <class... Steps>
struct StepList {};
}  // namespace wavefount
