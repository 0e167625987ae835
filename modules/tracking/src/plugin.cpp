#include "wavefount/core/plugin.h"

#include "wavefount/core/doubts.h"
#include "wavefount/core/text.h"
#include "wavefount/tracking/link_nuclei.h"

namespace wavefount {
namespace {

/// Share of mitoses with an equally good other pairing above which a person should look.
constexpr double ambiguous_share = 0.02;

class LinkNuclei : public AcquisitionStep {
 public:
  using Self = LinkNuclei;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(LinkNuclei, AcquisitionStep);

  StepDeclaration declaration() const override {
    StepDeclaration declared;
    declared.name = "link-nuclei";
    declared.sentence =
        "Follows nuclei from frame to frame and through mitosis, and leaves out false alarms and "
        "static debris.";
    declared.scope = Scope::acquisition;
    declared.needs = {FilmDescription::record_name, Observations::record_name, Tube::record_name,
                      Drift::record_name};
    declared.makes = {Nuclei::record_name};
    declared.parameters = {
        {"divisions",
         ParameterKind::yes_no,
         "",
         {},
         {},
         "no",
         {},
         "Whether a nucleus may re-form as two; no, since nuclei in extract without added "
         "centrosomes re-form as one."},
        {"debris",
         ParameterKind::choice,
         "",
         {},
         {},
         "drop",
         {"drop", "keep"},
         "What to do with static bright things that neither fill nor empty while nuclei around "
         "them cycle; dropped, since they would pass for nuclei that never enter mitosis."},
        {"mitosis_min",
         ParameterKind::number,
         "min",
         0.1,
         240,
         "",
         {},
         "Expected time between a nucleus' loss and its re-formation; left empty it starts from 10 "
         "minutes and follows the film's own mitoses."},
        {"reformation_um",
         ParameterKind::number,
         "um",
         0.1,
         1000,
         "",
         {},
         "How far from its predicted place a nucleus may re-form; left empty it follows from the "
         "film's own mitoses and the distance between nuclei."}};
    return declared;
  }

  void process(AcquisitionWork& work) const override {
    auto& records = *work.records;
    LinkSettings settings;
    settings.divisions = parameters().yes("divisions");
    settings.drop_debris = parameters().text("debris") == "drop";
    settings.mitosis_min = parameters().optional_number("mitosis_min");
    settings.reformation_um = parameters().optional_number("reformation_um");
    auto linked = link_nuclei(records.get<FilmDescription>(), records.get<Observations>(),
                              records.get<Tube>(), records.get<Drift>(), settings);
    if (work.messages != nullptr) tell(linked, *work.messages);
    add_doubts(linked.report, records);
    records.put(std::move(linked.nuclei));
  }

 protected:
  LinkNuclei() = default;
  ~LinkNuclei() override = default;

 private:
  static void tell(const LinkedNuclei& linked, Messages& messages) {
    const auto& report = linked.report;
    messages.note("Linked " + std::to_string(linked.nuclei.nuclei.size()) + " nuclei through " +
                  std::to_string(report.mitoses) + " mitoses of " +
                  rounded_text(linked.nuclei.mitosis_min, 3) + " min out of sight (median), " +
                  rounded_text(report.displacement_um, 3) + " um displacement an axis; motion " +
                  rounded_text(report.motion_um, 3) + " um a frame.");
    if (report.debris > 0)
      messages.note("Left out " + std::to_string(report.debris) +
                    " static things that neither filled nor emptied while nuclei cycled.");
    if (report.spurious_sightings > 0)
      messages.note("Left out " + std::to_string(report.spurious_sightings) +
                    " sightings as false alarms or light spreading after a release.");
  }

  static void add_doubts(const LinkReport& report, RecordStore& records) {
    std::vector<Doubt> found;
    if (report.ambiguous_mitoses > ambiguous_share * report.mitoses)
      found.push_back({"linking",
                       "In " + std::to_string(report.ambiguous_mitoses) + " of " +
                           std::to_string(report.mitoses) +
                           " mitoses another pairing of nuclei fits nearly as well; see the "
                           "notes of the nuclei.",
                       0.5});
    if (report.unreported_jumps > 0)
      found.push_back({"drift jump",
                       "In " + std::to_string(report.unreported_jumps) +
                           " frames all nuclei shifted together beyond the measured drift.",
                       0.5});
    if (found.empty()) return;
    if (!records.has<Doubts>()) records.put(Doubts{});
    auto& doubts = records.edit<Doubts>().doubts;
    doubts.insert(doubts.end(), found.begin(), found.end());
  }
};

}  // namespace
}  // namespace wavefount

WAVEFOUNT_PLUGIN("Linking of nuclei over time and mitosis.", wavefount::LinkNuclei)
