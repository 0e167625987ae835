#include "wavefount/core/plugin.h"

#include "wavefount/timing/entries.h"

namespace wavefount {

namespace {

class TimeEntries : public AcquisitionStep {
 public:
  using Self = TimeEntries;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self) itkTypeMacro(TimeEntries, AcquisitionStep)

      StepDeclaration declaration() const override {
    StepDeclaration step;
    step.name = "time-entries";
    step.sentence =
        "Splits each nucleus into interphases and times mitotic entry on the fixed aperture.";
    step.needs = {"film", "nuclei", "aperture-traces", "tube"};
    step.makes = {"interphases"};
    step.parameters = {
        {"longest_fall_min",
         ParameterKind::number,
         "min",
         0.2,
         60.0,
         "4",
         {},
         "A loss that takes longer is fading, not mitotic entry; release and diffusion out of a "
         "nucleus take a minute or two."},
        {"window_before_min",
         ParameterKind::number,
         "min",
         0.1,
         120.0,
         "",
         {},
         "Length of the filling before the fall that is fitted; by default 5 min, at least six "
         "frames, over which a parabola follows any filling."},
        {"window_after_min",
         ParameterKind::number,
         "min",
         0.1,
         120.0,
         "",
         {},
         "Length after the fall that is fitted, at most until the nucleus forms again; by default "
         "4 min, at least five frames."},
        {"shape_falls",
         ParameterKind::integer,
         "1",
         1.0,
         10000.0,
         "32",
         {},
         "Most falls of a film that the shape of the release is learned from; more gain little and "
         "take time."},
        {"stamp",
         ParameterKind::choice,
         "",
         {},
         {},
         "start",
         {"start", "middle", "end"},
         "Where in the exposure the time stamps lie; cameras and most formats stamp its start."}};
    return step;
  }

  void process(AcquisitionWork& work) const override {
    auto& records = *work.records;
    EntrySettings settings;
    settings.longest_fall_min = parameters().number("longest_fall_min");
    settings.window_before_min = parameters().optional_number("window_before_min").value_or(0);
    settings.window_after_min = parameters().optional_number("window_after_min").value_or(0);
    settings.shape_falls = parameters().integer("shape_falls");
    const auto stamp = parameters().text("stamp");
    settings.stamp = stamp == "middle" ? Stamp::middle : stamp == "end" ? Stamp::end : Stamp::start;
    records.put(time_entries(records.get<FilmDescription>(), records.get<Nuclei>(),
                             records.get<ApertureTraces>(), records.peek<Tube>(),
                             records.peek<CameraModel>(), settings));
  }
};

}  // namespace

}  // namespace wavefount

WAVEFOUNT_PLUGIN("Times of mitotic entry.", wavefount::TimeEntries)
