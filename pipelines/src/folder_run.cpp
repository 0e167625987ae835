#include "folder_run.h"

#include <tbb/task_group.h>

#include <algorithm>
#include <atomic>

#include "film_measurement.h"
#include "interruption.h"
#include "run_record.h"
#include "wavefount/acquisition/open_film.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

namespace fs = std::filesystem;

/// Frames in flight a thread: enough that no thread waits for the one before it to be collected.
constexpr int tokens_per_thread = 2;

bool is_safe_name(const std::string& name) {
  return !name.empty() && name != "." && name != ".." && name.front() != '/';
}

/// An earlier result counts when every acquisition of the film is there with the same fingerprint.
void find_earlier(FilmJob& job, const RunFolder& folder) {
  const auto own = read_earlier_result(folder.folder_of(job.name));
  if (!own || own->fingerprint != job.fingerprint) return;
  for (const auto& name : own->film_acquisitions) {
    const auto other = read_earlier_result(folder.folder_of(name));
    if (!other || other->fingerprint != job.fingerprint) return;
  }
  job.done_before = true;
  job.acquisitions = own->film_acquisitions;
}

FilmJob plan_job(const FoundFilm& film, const ChannelRoles& roles, const Pipeline& pipeline) {
  FilmJob job;
  job.name = film.name;
  job.problem = film.problem;
  if (job.problem.empty() && !is_safe_name(job.name))
    job.problem = "The film " + film.source.string() + " has no usable name; rename it.";
  if (!job.problem.empty()) return job;
  try {
    job.source = open_film(film, roles);
    job.fingerprint = fingerprint_of(job.source->description(), pipeline);
  } catch (const std::exception& error) {
    job.problem = error.what();
  }
  return job;
}

/// What is not ours to foresee (out of memory, a library's exception) still stops one film only.
template <class Work>
void guarded(FilmJob& job, Progress& progress, Work work) {
  try {
    work();
    return;
  } catch (const Problem& problem) {
    job.problem = problem.what();
  } catch (const std::bad_alloc&) {
    job.problem = "The film " + job.name + " needs more memory than there is; use fewer --jobs.";
  } catch (const std::exception& error) {
    job.problem = "The film " + job.name + " stopped with an unforeseen error (" +
                  std::string(error.what()) + "); please report it.";
  }
  progress.say("failed  " + job.name + ": " + job.problem);
}

/// Runs the films one after the other, each one's second half beside the next one's stream.
class JobRunner {
 public:
  JobRunner(const Pipeline& pipeline, const RunFolder& folder, int threads, Progress& progress)
      : pipeline_(pipeline),
        folder_(folder),
        tokens_(threads * tokens_per_thread),
        progress_(progress) {}

  bool run(std::vector<FilmJob>& jobs) {
    for (auto& job : jobs) {
      if (job.done_before || !job.problem.empty()) continue;
      if (interrupted()) break;
      start(job);
    }
    second_half_.wait();
    return !stopped_ && !interrupted();
  }

 private:
  void start(FilmJob& job) {
    auto film = std::make_shared<std::unique_ptr<FilmMeasurement>>();
    bool streamed = false;
    guarded(job, progress_, [&] {
      try {
        *film = std::make_unique<FilmMeasurement>(job.source, pipeline_, folder_);
        (*film)->stream(tokens_, [this] { progress_.frame_done(); });
        streamed = true;
      } catch (const Interrupted&) {
        stopped_ = true;
      }
    });
    // One second half at a time: its records and work file are what takes memory and disk.
    second_half_.wait();
    if (!streamed) {
      if (!job.problem.empty()) folder_.retract(job.name);
      return;
    }
    second_half_.run([this, &job, film] { finish(job, **film); });
  }

  void finish(FilmJob& job, FilmMeasurement& film) {
    guarded(job, progress_, [&] {
      try {
        film.finish();
        film.publish(job.fingerprint);
        job.acquisitions = film.acquisitions();
        progress_.say("done    " + job.name);
      } catch (const Interrupted&) {
        stopped_ = true;
      }
    });
    if (!job.problem.empty()) folder_.retract(job.name);
    progress_.film_done();
  }

  const Pipeline& pipeline_;
  const RunFolder& folder_;
  const int tokens_;
  Progress& progress_;
  tbb::task_group second_half_;
  std::atomic<bool> stopped_{false};
};

/// The sheet's row for a tube of its own, else that of its film.
std::map<std::string, std::string> sheet_row(const FilmJob& job, const std::string& name,
                                             const FolderListing& listing) {
  if (const auto row = listing.tube_rows.find(name); row != listing.tube_rows.end())
    return row->second;
  for (const auto& film : listing.films) {
    if (film.name == job.name) return film.sheet;
  }
  return {};
}

AcquisitionResult result_of(const FilmJob& job, const std::string& name,
                            const FolderListing& listing) {
  AcquisitionResult result;
  result.name = name;
  result.message = job.problem;
  result.sheet = sheet_row(job, name, listing);
  result.sheet_columns = listing.sheet_columns;
  return result;
}

}  // namespace

std::vector<FilmJob> plan_jobs(const FolderListing& listing, const ChannelRoles& roles,
                               const std::vector<std::string>& only, bool again,
                               const Pipeline& pipeline, const RunFolder& folder) {
  std::vector<FilmJob> jobs;
  std::vector<std::string> unknown = only;
  for (const auto& film : listing.films) {
    auto job = plan_job(film, roles, pipeline);
    const bool wanted =
        only.empty() || std::find(only.begin(), only.end(), film.name) != only.end();
    std::erase(unknown, film.name);
    if (job.problem.empty() && !(again && wanted)) find_earlier(job, folder);
    // Films that were not asked for take part in the tables with what is there already.
    if (wanted || job.done_before) jobs.push_back(std::move(job));
  }
  if (!unknown.empty())
    throw Problem("There is no acquisition '" + unknown.front() +
                  "' in the folder (`wavefount check` lists all); correct --only.");
  return jobs;
}

bool measure_jobs(std::vector<FilmJob>& jobs, const Pipeline& pipeline, const RunFolder& folder,
                  int threads, Progress& progress) {
  return JobRunner(pipeline, folder, threads, progress).run(jobs);
}

std::vector<AcquisitionResult> results_of(const std::vector<FilmJob>& jobs,
                                          const FolderListing& listing, const RunFolder& folder) {
  std::vector<AcquisitionResult> results;
  for (const auto& job : jobs) {
    if (!job.problem.empty()) {
      results.push_back(result_of(job, job.name, listing));
      continue;
    }
    for (const auto& name : job.acquisitions) {
      auto result = result_of(job, name, listing);
      result.done = true;
      result.folder = folder.folder_of(name);
      if (const auto earlier = read_earlier_result(result.folder))
        result.message = earlier->message;
      results.push_back(std::move(result));
    }
  }
  return results;
}

}  // namespace wavefount
