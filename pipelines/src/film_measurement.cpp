#include "film_measurement.h"

#include <algorithm>

#include "film_stream.h"
#include "interruption.h"
#include "run_record.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/random.h"
#include "wavefount/core/reduced_film.h"
#include "wavefount/core/tube.h"

namespace wavefount {
namespace {

std::vector<std::string> stage_names(const Pipeline& pipeline) {
  std::vector<std::string> names = {"read"};
  const auto add = [&](const auto& steps) {
    for (const auto& step : steps) names.push_back(step->declaration().name);
  };
  add(pipeline.before);
  add(pipeline.stream);
  add(pipeline.after);
  names.emplace_back("checksum");
  return names;
}

/// A place for the whole field where no step looked for tubes.
Tubes whole_field(const FilmDescription& film) {
  Tube tube;
  const double right = (film.width - 0.5) * film.pixel_um;
  const double bottom = (film.height - 0.5) * film.pixel_um;
  const double first = -0.5 * film.pixel_um;
  tube.outline_um = {{first, first}, {right, first}, {right, bottom}, {first, bottom}};
  const double middle = (first + bottom) / 2;
  tube.axis_um = {{first, middle}, {right, middle}};
  tube.length_um = right - first;
  tube.width_um = bottom - first;
  tube.left_end = tube.right_end = tube.upper_wall = tube.lower_wall = Boundary::open;
  return {{tube}};
}

}  // namespace

FilmMeasurement::FilmMeasurement(std::shared_ptr<const FrameSource> source,
                                 const Pipeline& pipeline, const RunFolder& folder)
    : source_(std::move(source)),
      pipeline_(pipeline),
      folder_(folder),
      clock_(stage_names(pipeline)) {
  const auto& film = source_->description();
  records_.put(film);
  for (const auto& note : film.notes) messages_.warn(note);
  scratch_ = folder_.aside(film.name, "work");
}

AcquisitionWork FilmMeasurement::work_for(RecordStore& records, Messages& messages,
                                          const std::filesystem::path& output) const {
  AcquisitionWork work;
  work.records = &records;
  work.source = source_.get();
  work.name = source_->description().name;
  work.output = output;
  work.scratch = scratch_;
  work.messages = &messages;
  work.seed = seed_from(pipeline_.file.seed, work.name);
  return work;
}

void FilmMeasurement::run_step(const AcquisitionStep& step, AcquisitionWork& work) {
  if (interrupted()) throw Interrupted{};
  const StageTimer timer(clock_, step.declaration().name);
  step.process(work);
}

void FilmMeasurement::stream(int tokens, const std::function<void()>& on_frame) {
  auto work = work_for(records_, messages_, scratch_);
  for (const auto& step : pipeline_.before) run_step(*step, work);
  if (!records_.has<Tubes>()) records_.put(whole_field(source_->description()));
  if (!pipeline_.stream.empty()) {
    observations_ = stream_frames(*source_, pipeline_.stream, records_, tokens, clock_, on_frame);
    summarise_unusable_frames();
  }
  const auto& name = source_->description().name;
  for (const auto& tube : records_.get<Tubes>().tubes)
    names_.push_back(tube.index == 0 ? name : name + "/tube-" + std::to_string(tube.index + 1));
}

void FilmMeasurement::summarise_unusable_frames() {
  std::size_t unusable = 0;
  std::string first;
  for (const auto& frame : observations_.frames) {
    if (frame.usable) continue;
    if (unusable++ == 0) first = "frame " + std::to_string(frame.frame) + ": " + frame.problem;
  }
  if (unusable == 0) return;
  if (unusable == observations_.frames.size())
    throw Problem("No frame of " + source_->description().source.string() + " can be used (" +
                  first + ").");
  messages_.warn(std::to_string(unusable) + " of " + std::to_string(observations_.frames.size()) +
                 " frames were left out (the first is " + first + ")");
}

RecordStore FilmMeasurement::records_of_tube(std::size_t tube) const {
  RecordStore records = records_;
  Observations own = observations_;
  for (auto& frame : own.frames) {
    const auto elsewhere = [&](const Sighting& seen) {
      return seen.tube != static_cast<int>(tube);
    };
    frame.sightings.erase(std::remove_if(frame.sightings.begin(), frame.sightings.end(), elsewhere),
                          frame.sightings.end());
  }
  records.put(std::move(own));
  records.put(records_.get<Tubes>().tubes.at(tube));
  return records;
}

void FilmMeasurement::finish() {
  for (std::size_t tube = 0; tube < names_.size(); ++tube) {
    tubes_.push_back({folder_.aside(names_[tube], "results"), messages_});
    auto records = records_of_tube(tube);
    auto work = work_for(records, tubes_.back().messages, tubes_.back().aside);
    work.name = names_[tube];
    for (const auto& step : pipeline_.after) run_step(*step, work);
  }
  // The work file is large; it goes as soon as nobody needs it.
  records_ = RecordStore();
  std::error_code error;
  std::filesystem::remove_all(scratch_, error);
}

void FilmMeasurement::publish(const std::string& fingerprint) {
  auto film = source_->description();
  {
    const StageTimer timer(clock_, "checksum");
    add_checksums(film);
  }
  for (std::size_t tube = 0; tube < names_.size(); ++tube) {
    write_run_record(tubes_[tube].aside / record_file_name,
                     {names_[tube], names_, film, pipeline_, tubes_[tube].messages,
                      clock_.seconds(), fingerprint});
  }
  // The film's own acquisition last: its record names the others and says that all are there.
  for (std::size_t tube = names_.size(); tube-- > 0;)
    folder_.publish(tubes_[tube].aside, names_[tube]);
}

}  // namespace wavefount
