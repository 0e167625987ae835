#pragma once

#include <map>
#include <memory>
#include <string>
#include <vector>

#include "pipeline.h"
#include "progress.h"
#include "run_folder.h"
#include "wavefount/acquisition/listing.h"
#include "wavefount/core/messages.h"
#include "wavefount/core/step.h"

namespace wavefount {

/// One film of the folder as a run sees it.
struct FilmJob {
  std::string name;
  std::shared_ptr<const FrameSource> source;  ///< empty: it could not be opened
  std::string problem;                        ///< why it failed, a sentence
  std::string fingerprint;
  bool done_before = false;
  std::vector<std::string> acquisitions;  ///< all that came of it, once done
};

/// Opens every film that a run is about and finds out which are done already.
std::vector<FilmJob> plan_jobs(const FolderListing& listing, const ChannelRoles& roles,
                               const std::vector<std::string>& only, bool again,
                               const Pipeline& pipeline, const RunFolder& folder);

/// Measures the jobs that are left, `threads` threads in all; the second half of one film runs
/// beside the stream of the next. Returns false when interrupted.
bool measure_jobs(std::vector<FilmJob>& jobs, const Pipeline& pipeline, const RunFolder& folder,
                  int threads, Progress& progress);

/// The jobs as the folder steps see them: a row an acquisition.
std::vector<AcquisitionResult> results_of(const std::vector<FilmJob>& jobs,
                                          const FolderListing& listing, const RunFolder& folder);

}  // namespace wavefount
