#include "wavefount/core/plugin.h"

#include "steps.h"
#include "wavefount/core/film.h"
#include "wavefount/core/interphase.h"
#include "wavefount/core/wave.h"
#include "wavefount/waves/find_waves.h"
#include "wavefount/waves/numbering.h"
#include "wavefount/waves/origins.h"
#include "wavefount/waves/territories.h"

namespace wavefount {
namespace {

ParameterDeclaration number(const std::string& name, const std::string& unit, double lowest,
                            double highest, const std::string& default_text,
                            const std::string& sentence) {
  return {name, ParameterKind::number, unit, lowest, highest, default_text, {}, sentence};
}

ParameterDeclaration whole(const std::string& name, double lowest, double highest,
                           const std::string& default_text, const std::string& sentence) {
  return {name, ParameterKind::integer, "1", lowest, highest, default_text, {}, sentence};
}

std::vector<ParameterDeclaration> neighbour_parameters() {
  return {number("longest_link_spacings", "1", 1, 10, "2.5",
                 "Nuclei further apart than this many median spacings are no neighbours: what "
                 "happens in between is not seen; two nuclei missing in a row are still bridged."),
          number("longest_bridge_spacings", "1", 1, 50, "6",
                 "Over a gap up to this many spacings entries still belong to one wave, though "
                 "the two sides never count as independent origins.")};
}

NeighbourRules neighbour_rules(const Parameters& parameters) {
  return {parameters.number("longest_link_spacings"), parameters.number("longest_bridge_spacings")};
}

Chronology chronology_in(const RecordStore& records, const NeighbourRules& rules) {
  return chronology_of(records.get<WaveEntries>().entries, records.get<Nuclei>(),
                       records.get<Interphases>(), records.get<Tube>(), records.get<Territories>(),
                       rules);
}

}  // namespace

StepDeclaration NumberCyclesStep::declaration() const {
  return {"number-cycles",
          "Numbers the mitoses so that one number is one mitosis in all nuclei of the tube.",
          Scope::acquisition,
          {"film", "tube", "nuclei", "interphases"},
          {"wave-entries", "territories"},
          neighbour_parameters()};
}

void NumberCyclesStep::process(AcquisitionWork& work) const {
  auto& records = *work.records;
  const auto& film = records.get<FilmDescription>();
  const auto& tube = records.get<Tube>();
  records.put(measure_territories(records.get<Nuclei>(), tube, spread_moments(film.times_min)));
  records.put(entries_of(records.get<Interphases>(), tube, film.overrides));
  const auto chronology = chronology_in(records, neighbour_rules(parameters()));
  auto& entries = records.edit<WaveEntries>().entries;
  const auto cycles = cycle_numbers(entries, chronology);
  for (std::size_t i = 0; i < entries.size(); ++i) entries[i].cycle = cycles[i];
}

StepDeclaration FindWavesStep::declaration() const {
  auto parameters = neighbour_parameters();
  parameters.push_back(
      number("longest_mitosis_min", "min", 1, 120, "20",
             "Time in mitosis where the film shows no nucleus form again, to tell arrest or death "
             "from an end of the film; nuclei form again within 5 to 20 minutes."));
  parameters.push_back(
      number("unseen_jitter_min", "min", 0.01, 30, "1",
             "Scatter of nuclei around the front where no wave has the five nuclei to tell it "
             "from."));
  parameters.push_back(
      number("least_timing_error_frames", "1", 0, 1, "0.03",
             "Standard error in frame intervals that no entry time falls below, for what the fit "
             "of one nucleus cannot know of (focus, slow flow)."));
  parameters.push_back(
      whole("draws", 50, 10000, "400",
            "Whole arrival fields drawn a wave; 400 hold a probability of 0.9 to 0.015."));
  return {"find-waves",
          "Gathers entries into waves and measures their fronts: period, fate, slowness, speed.",
          Scope::acquisition,
          {"film", "wave-entries", "territories", "interphases", "nuclei", "tube"},
          {"waves", "arrival-fields"},
          parameters};
}

void FindWavesStep::process(AcquisitionWork& work) const {
  auto& records = *work.records;
  const auto& film = records.get<FilmDescription>();
  WaveRules rules;
  rules.neighbours = neighbour_rules(parameters());
  rules.longest_mitosis_min = parameters().number("longest_mitosis_min");
  rules.unseen_jitter_min = parameters().number("unseen_jitter_min");
  rules.least_se_min = parameters().number("least_timing_error_frames") * film.frame_interval_min();
  rules.draws = parameters().integer("draws");
  rules.seed = work.seed;
  rules.film_end_min = film.times_min.empty() ? 0 : film.times_min.back();
  if (film.overrides.last_healthy_min)
    rules.film_end_min = std::min(rules.film_end_min, *film.overrides.last_healthy_min);
  const auto chronology = chronology_in(records, rules.neighbours);
  const WaveView view{&records.get<Tube>(), &records.get<Interphases>(), &records.get<Nuclei>(),
                      &chronology};
  auto found = find_waves(records.edit<WaveEntries>(), view, rules);
  records.put(std::move(found.waves));
  records.put(std::move(found.fields));
}

StepDeclaration FindOriginsStep::declaration() const {
  auto parameters = neighbour_parameters();
  parameters.push_back(number("claim_probability", "1", 0.5, 1, "0.9",
                              "An origin, or several at once, is claimed from this probability "
                              "on."));
  parameters.push_back(number("visible_probability", "1", 0.5, 1, "0.95",
                              "A wave shows a direction when its field varies by more than a third "
                              "of jitter and timing error with this probability."));
  parameters.push_back(number("order_p", "1", 0, 1, "0.05",
                              "A scattered wave is incoherent when chance deals its times out so "
                              "smoothly more often than this."));
  parameters.push_back(
      whole("permutations", 99, 100000, "999", "Random orders dealt out for that share."));
  parameters.push_back(number("scatter_min", "min", 0, 120, "",
                              "Spread (standard deviation) of entry times that the nuclei's jitter "
                              "alone explains; 8 % of the period when not given."));
  return {"find-origins",
          "Finds where each wave began, how likely that is, and what sets the leading nucleus "
          "apart.",
          Scope::acquisition,
          {"film", "waves", "wave-entries", "arrival-fields", "interphases", "nuclei", "tube",
           "territories"},
          {"origins"},
          parameters};
}

void FindOriginsStep::process(AcquisitionWork& work) const {
  auto& records = *work.records;
  const auto& film = records.get<FilmDescription>();
  OriginRules rules;
  rules.claim_probability = parameters().number("claim_probability");
  rules.visible_probability = parameters().number("visible_probability");
  rules.order_p = parameters().number("order_p");
  rules.permutations = parameters().integer("permutations");
  rules.scatter_min = parameters().optional_number("scatter_min");
  rules.frame_interval_min = film.frame_interval_min();
  rules.film_start_min = film.times_min.empty() ? 0 : film.times_min.front();
  rules.seed = work.seed;
  const auto chronology = chronology_in(records, neighbour_rules(parameters()));
  const OriginView view{&records.get<Tube>(),
                        &records.get<Interphases>(),
                        &records.get<Nuclei>(),
                        &records.get<Territories>(),
                        &chronology,
                        &records.get<ArrivalFields>()};
  find_origins(records.edit<Waves>(), records.edit<WaveEntries>(), view, rules);
}

}  // namespace wavefount

WAVEFOUNT_PLUGIN("Cycle numbers, mitotic waves and their origins.", wavefount::NumberCyclesStep,
                 wavefount::FindWavesStep, wavefount::FindOriginsStep)
