#include "measure_places_step.h"

#include "wavefount/nuclei/measure_places.h"

namespace wavefount::nuclei {

StepDeclaration MeasurePlaces::declaration() const {
  StepDeclaration said;
  said.name = "measure-places";
  said.sentence =
      "Measures the light at every nucleus' place with a fixed aperture in all frames, before it "
      "forms, through its mitoses and after it empties.";
  said.scope = Scope::acquisition;
  said.needs = {"film", "camera", "reduced-film", "tube", "drift", "observations", "nuclei"};
  said.makes = {"aperture-traces"};
  said.parameters = {
      {"before_min",
       ParameterKind::number,
       "min",
       0,
       1000,
       "15",
       {},
       "How long before a nucleus is first seen its place is measured; 15 min hold the mitosis it "
       "forms after."},
      {"after_min",
       ParameterKind::number,
       "min",
       0,
       1000,
       "30",
       {},
       "How long after a nucleus is last seen its place is measured; in 30 min what it released "
       "has "
       "spread."}};
  return said;
}

void MeasurePlaces::process(AcquisitionWork& work) const {
  RecordStore& records = *work.records;
  const PlacesInput input{records.get<FilmDescription>(),
                          records.get<ReducedFilm>(),
                          records.get<CameraModel>(),
                          records.get<Tube>(),
                          records.get<Drift>(),
                          records.get<Observations>(),
                          parameters().number("before_min"),
                          parameters().number("after_min")};
  records.put(measure_places(input, records.edit<Nuclei>()));
}

}  // namespace wavefount::nuclei
