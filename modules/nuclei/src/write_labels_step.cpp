#include "write_labels_step.h"

#include "wavefount/nuclei/labels.h"

namespace wavefount::nuclei {

StepDeclaration WriteLabels::declaration() const {
  StepDeclaration said;
  said.name = "write-labels";
  said.sentence =
      "Writes labels.tif: one page a frame, 0 background, number of the nucleus + 1 inside its "
      "outline.";
  said.scope = Scope::acquisition;
  said.needs = {"film", "observations", "nuclei"};
  return said;
}

void WriteLabels::process(AcquisitionWork& work) const {
  const auto& film = work.records->get<FilmDescription>();
  const LabelPainter painter(film, work.records->get<Observations>(), work.records->get<Nuclei>());
  write_labels(work.output / "labels.tif", painter, film.frames, film.width, film.height);
}

}  // namespace wavefount::nuclei
