#pragma once

#include <itkLightObject.h>
#include <itkObjectFactoryBase.h>

#include <cstdint>
#include <filesystem>
#include <map>
#include <string>
#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/core/messages.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/parameters.h"
#include "wavefount/core/record_store.h"

namespace wavefount {

enum class Scope { frame, acquisition, folder };

/// What a step says of itself before it sees any data.
struct StepDeclaration {
  std::string name;      ///< as in pipelines: lower-case words with hyphens, a verb first
  std::string sentence;  ///< what it does
  Scope scope = Scope::acquisition;
  std::vector<std::string> needs;  ///< record names an earlier step (or the engine) makes
  std::vector<std::string> makes;
  std::vector<ParameterDeclaration> parameters;
};

/// The unit a pipeline names. Registered in ITK's object factory under its name.
class Step : public itk::LightObject {
 public:
  using Self = Step;
  using Pointer = itk::SmartPointer<Self>;
  itkTypeMacro(Step, itk::LightObject);

  virtual StepDeclaration declaration() const = 0;
  /// Called once before any processing. Throws Problem.
  void configure(const std::map<std::string, std::string>& given);
  const Parameters& parameters() const { return parameters_; }

 protected:
  Step();
  ~Step() override;

 private:
  Parameters parameters_;
};

/// A frame on its way through the frame steps.
struct FrameWork {
  int frame = 0;
  double time_min = 0;
  ImagePointer pixels;    ///< of the reporter, counts; z-stacks summed
  ImagePointer sharpest;  ///< the best plane for outlines; the same as pixels without z
  ImagePointer reduced;   ///< made by `reduce-frames`, cropped as the ReducedFilm is
  FrameObservation observation;
  RecordStore extras;  ///< what plug-ins hand to later frame steps
};

/// One frame at a time; const and thread-safe, runs on many frames at once.
class FrameStep : public Step {
 public:
  using Pointer = itk::SmartPointer<FrameStep>;
  /// `film` holds what the steps before the stream made (film, camera, prescan, tubes …).
  virtual void process(FrameWork& frame, const RecordStore& film) const = 0;

 protected:
  FrameStep();
  ~FrameStep() override;
};

/// What an acquisition step works with. Before the stream a step runs once a film; after it, once a
/// tube, with records of its own (`tube`, and `observations` of that tube alone).
struct AcquisitionWork {
  RecordStore* records = nullptr;
  const FrameSource* source = nullptr;  ///< for steps that touch pixels
  std::string name;                     ///< acquisition name as in the tables
  std::filesystem::path output;         ///< written aside, renamed by the engine when complete
  std::filesystem::path scratch;        ///< for work files; removed by the engine
  Messages* messages = nullptr;
  std::uint64_t seed = 0;  ///< from pipeline seed and acquisition name
};

class AcquisitionStep : public Step {
 public:
  using Pointer = itk::SmartPointer<AcquisitionStep>;
  virtual void process(AcquisitionWork& work) const = 0;

 protected:
  AcquisitionStep();
  ~AcquisitionStep() override;
};

/// One acquisition as the folder steps see it.
struct AcquisitionResult {
  std::string name;
  std::filesystem::path folder;  ///< its results; empty when it failed
  bool done = false;
  std::string message;  ///< why it failed, or its warnings
  std::map<std::string, std::string> sheet;
  std::vector<std::string> sheet_columns;
};

struct FolderWork {
  std::filesystem::path output;
  std::vector<AcquisitionResult> acquisitions;  ///< in natural order of names
  Messages* messages = nullptr;
};

class FolderStep : public Step {
 public:
  using Pointer = itk::SmartPointer<FolderStep>;
  virtual void process(FolderWork& work) const = 0;

 protected:
  FolderStep();
  ~FolderStep() override;
};

}  // namespace wavefount
