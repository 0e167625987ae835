#include "wavefount/core/plugin.h"

#include "wavefount/kinetics/import.h"

namespace wavefount {

namespace {

class FitImport : public AcquisitionStep {
 public:
  using Self = FitImport;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self) itkTypeMacro(FitImport, AcquisitionStep)

      StepDeclaration declaration() const override {
    StepDeclaration step;
    step.name = "fit-import";
    step.sentence =
        "Fits how each nucleus fills after it formed: rate constant, initial import, plateau.";
    step.needs = {"film", "camera", "nuclei", "aperture-traces", "interphases"};
    step.makes = {"import"};
    step.parameters = {
        {"bleaching_correction",
         ParameterKind::choice,
         "",
         {},
         {},
         "auto",
         {"auto", "never"},
         "auto corrects where the tube's whole light is in view and falls steadily; never leaves "
         "counts as they are."},
        {"blur_correction",
         ParameterKind::choice,
         "",
         {},
         {},
         "auto",
         {"auto", "never"},
         "auto undoes the dimming of small nuclei by blur, as measured on the film's own nuclei."},
        {"before_entry_min",
         ParameterKind::number,
         "min",
         0.0,
         30.0,
         "",
         {},
         "Frames this close before mitotic entry are left out, since a nucleus may leak by then; "
         "by default one frame interval."}};
    return step;
  }

  void process(AcquisitionWork& work) const override {
    auto& records = *work.records;
    const auto& film = records.get<FilmDescription>();
    const auto& camera = records.get<CameraModel>();
    const auto& nuclei = records.get<Nuclei>();
    ImportSettings settings;
    settings.exposure_min = film.exposure_min;
    settings.before_entry_min =
        parameters().optional_number("before_entry_min").value_or(film.frame_interval_min());
    if (parameters().text("blur_correction") == "auto") settings.blur = estimate_blur(nuclei);
    const auto* observations = records.peek<Observations>();
    const auto* tube = records.peek<Tube>();
    if (parameters().text("bleaching_correction") == "auto" && observations && tube) {
      settings.bleaching = estimate_bleaching(*observations, *tube, camera);
      if (work.messages) work.messages->note(settings.bleaching.sentence);
    }
    fit_imports(records.edit<Interphases>(), nuclei, camera, settings);
  }
};

}  // namespace

}  // namespace wavefount

WAVEFOUNT_PLUGIN("Import kinetics of nuclei.", wavefount::FitImport)
