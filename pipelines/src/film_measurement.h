#pragma once

#include <filesystem>
#include <functional>
#include <memory>
#include <string>
#include <vector>

#include "pipeline.h"
#include "run_folder.h"
#include "stage_clock.h"
#include "wavefount/core/messages.h"
#include "wavefount/core/observations.h"

namespace wavefount {

/// One film on its way through a pipeline: first the stream over its frames, then the steps on each
/// of its tubes. The two halves are separate so that one film's second half runs beside the next
/// film's first.
class FilmMeasurement {
 public:
  FilmMeasurement(std::shared_ptr<const FrameSource> source, const Pipeline& pipeline,
                  const RunFolder& folder);

  /// The steps before the stream and the stream. Throws Problem, Interrupted.
  void stream(int tokens, const std::function<void()>& on_frame);
  /// The steps after the stream, for each tube; results lie aside. Throws Problem, Interrupted.
  void finish();
  /// Writes the records and makes the results visible. `checksums` of the input files are computed
  /// here, `fingerprint` is what a new start compares.
  void publish(const std::string& fingerprint);

  /// Names of the film's acquisitions (tubes), known after stream().
  const std::vector<std::string>& acquisitions() const { return names_; }

 private:
  struct TubeResult {
    std::filesystem::path aside;
    Messages messages;
  };

  AcquisitionWork work_for(RecordStore& records, Messages& messages,
                           const std::filesystem::path& output) const;
  void run_step(const AcquisitionStep& step, AcquisitionWork& work);
  void summarise_unusable_frames();
  RecordStore records_of_tube(std::size_t tube) const;

  std::shared_ptr<const FrameSource> source_;
  const Pipeline& pipeline_;
  const RunFolder& folder_;
  StageClock clock_;
  RecordStore records_;
  Messages messages_;
  Observations observations_;
  std::filesystem::path scratch_;
  std::vector<std::string> names_;
  std::vector<TubeResult> tubes_;
};

}  // namespace wavefount
