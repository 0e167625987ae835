#include "run_command.h"

#include <tbb/global_control.h>
#include <tbb/task_arena.h>

#include <cstdio>
#include <opencv2/core/utility.hpp>
#include <thread>

#include "folder_run.h"
#include "interruption.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

constexpr int all_done = 0;
constexpr int some_failed = 1;
constexpr int was_interrupted = 130;

std::string count_text(std::size_t count, const std::string& one) {
  return std::to_string(count) + " " + one + (count == 1 ? "" : "s");
}

/// What was found, a line a film.
void announce(const std::vector<FilmJob>& jobs, const FolderListing& listing,
              const std::filesystem::path& folder) {
  std::printf("%s in %s\n", count_text(listing.films.size(), "acquisition").c_str(),
              folder.c_str());
  for (const auto& message : listing.messages) std::printf("note    %s\n", message.c_str());
  for (const auto& job : jobs) {
    if (!job.problem.empty()) {
      std::printf("failed  %s: %s\n", job.name.c_str(), job.problem.c_str());
      continue;
    }
    const auto& film = job.source->description();
    std::printf("%s %s: %s of %d x %d pixels, %s um a pixel, every %s min, imaging channel%s %s\n",
                job.done_before ? "as was " : "found  ", job.name.c_str(),
                count_text(static_cast<std::size_t>(film.frames), "frame").c_str(), film.width,
                film.height, rounded_text(film.pixel_um).c_str(),
                rounded_text(film.frame_interval_min()).c_str(),
                film.channels.size() == 1 ? "" : "s", joined(film.channels, ", ").c_str());
  }
  std::fflush(stdout);
}

std::int64_t frames_left(const std::vector<FilmJob>& jobs) {
  std::int64_t frames = 0;
  for (const auto& job : jobs) {
    if (!job.done_before && job.problem.empty()) frames += job.source->description().frames;
  }
  return frames;
}

int films_left(const std::vector<FilmJob>& jobs) {
  int films = 0;
  for (const auto& job : jobs) films += !job.done_before && job.problem.empty() ? 1 : 0;
  return films;
}

void run_folder_steps(const Pipeline& pipeline, const std::vector<FilmJob>& jobs,
                      const FolderListing& listing, const RunFolder& folder, Messages& messages) {
  FolderWork work;
  work.output = folder.path();
  work.acquisitions = results_of(jobs, listing, folder);
  work.messages = &messages;
  for (const auto& step : pipeline.folder) step->process(work);
}

int closing_words(const std::vector<FilmJob>& jobs, const Messages& messages,
                  const RunFolder& folder) {
  std::size_t failed = 0;
  for (const auto& job : jobs) failed += job.problem.empty() ? 0 : 1;
  for (const auto& message : messages.all()) std::printf("note    %s\n", message.text.c_str());
  std::printf("%s done, %zu failed. Tables, workbook and pictures are in %s\n",
              count_text(jobs.size() - failed, "film").c_str(), failed, folder.path().c_str());
  std::printf("Research use only, not for diagnosis.\n");
  return failed == 0 ? all_done : some_failed;
}

}  // namespace

int run_folder(const RunOptions& options, const StepRegistry& registry) {
  const auto pipeline = make_pipeline(read_pipeline_file(options.pipeline), registry);
  const ChannelRoles roles{pipeline.file.reporter, pipeline.file.brightfield, pipeline.file.field};
  const auto listing = list_films(options.films);
  const RunFolder folder(options.output, options.films);
  listen_for_interruption();

  const int threads =
      options.jobs > 0 ? options.jobs : static_cast<int>(std::thread::hardware_concurrency());
  // OpenCV's own threads would come on top of ours.
  cv::setNumThreads(1);
  const tbb::global_control limit(tbb::global_control::max_allowed_parallelism,
                                  static_cast<std::size_t>(threads));
  tbb::task_arena arena(threads);

  auto jobs = plan_jobs(listing, roles, options.only, options.again, pipeline, folder);
  announce(jobs, listing, options.films);
  Progress progress(frames_left(jobs), films_left(jobs));
  bool whole = false;
  arena.execute([&] { whole = measure_jobs(jobs, pipeline, folder, threads, progress); });
  progress.finish();
  if (!whole) {
    std::printf("Interrupted. What was done is kept; the same command goes on from here.\n");
    return was_interrupted;
  }
  Messages messages;
  run_folder_steps(pipeline, jobs, listing, folder, messages);
  return closing_words(jobs, messages, folder);
}

}  // namespace wavefount
