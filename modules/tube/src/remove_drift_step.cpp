#include <string>
#include <utility>

#include "steps.h"
#include "wavefount/core/doubts.h"
#include "wavefount/core/film.h"
#include "wavefount/core/text.h"
#include "wavefount/tube/drift.h"

namespace wavefount::tube {
namespace {

std::string described(const Drift& drift, double pixel_um, const FilmDescription& film) {
  std::string text = "The image drifts by at most " +
                     rounded_text(farthest_px(drift) * pixel_um, 3) + " µm from the first frame.";
  if (drift.jumps.empty()) return text;
  std::vector<std::string> times;
  for (const int frame : drift.jumps)
    times.push_back(rounded_text(film.times_min.at(static_cast<std::size_t>(frame))));
  return text + " It jumps at " + joined(times, ", ") + " min.";
}

void doubt_jumps(const Drift& drift, const FilmDescription& film, RecordStore& records) {
  if (drift.jumps.empty()) return;
  if (!records.has<Doubts>()) records.put(Doubts());
  for (const int frame : drift.jumps)
    records.edit<Doubts>().doubts.push_back(
        {"drift-jump",
         "The image jumps between the frames " + std::to_string(frame - 1) + " and " +
             std::to_string(frame) + ", at " +
             rounded_text(film.times_min.at(static_cast<std::size_t>(frame))) +
             " min; check that the same nuclei are followed across.",
         0.4});
}

}  // namespace

StepDeclaration RemoveDrift::declaration() const {
  StepDeclaration said;
  said.name = "remove-drift";
  said.sentence =
      "Checks and smooths the shifts of the frames: outliers are replaced, jumps stay sharp and "
      "are reported.";
  said.scope = Scope::acquisition;
  said.needs = {"observations", "film"};
  said.makes = {"drift"};
  said.parameters = {{"jump_um",
                      ParameterKind::number,
                      "um",
                      0.1,
                      10000,
                      "5",
                      {},
                      "A step between two frames larger than this, and than eight times the usual "
                      "step, is a jump; below a nucleus' radius linking does not suffer."}};
  return said;
}

void RemoveDrift::process(AcquisitionWork& work) const {
  const auto& film = work.records->get<FilmDescription>();
  const auto& observations = work.records->get<Observations>();
  DriftSettings settings;
  settings.jump_px = parameters().number("jump_um") / film.pixel_um;
  auto drift = settle_drift(observations.frames, settings);
  work.messages->note(described(drift, film.pixel_um, film));
  doubt_jumps(drift, film, *work.records);
  work.records->put(std::move(drift));
}

}  // namespace wavefount::tube
