#include "wavefount/core/plugin.h"

#include "wavefount/core/observations.h"
#include "wavefount/core/reduced_film.h"
#include "wavefount/pictures/pictures.h"

namespace wavefount {
namespace {

class DrawPictures final : public AcquisitionStep {
 public:
  using Self = DrawPictures;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(DrawPictures, AcquisitionStep);

  StepDeclaration declaration() const override {
    return {"draw-pictures",
            "Draws a kymograph, a map, a montage and brightness curves of one acquisition.",
            Scope::acquisition,
            {FilmDescription::record_name, Observations::record_name, ReducedFilm::record_name},
            {},
            {}};
  }

  void process(AcquisitionWork& work) const override {
    const auto& records = *work.records;
    draw_kymograph(records, work.name).write_png(work.output / "kymograph.png");
    draw_map(records, work.name).write_png(work.output / "map.png");
    draw_montage(records, work.name).write_png(work.output / "montage.png");
    draw_curves(records, work.name).write_png(work.output / "curves.png");
  }
};

}  // namespace
}  // namespace wavefount

WAVEFOUNT_PLUGIN("Pictures: kymograph, map, montage, curves.", wavefount::DrawPictures)
