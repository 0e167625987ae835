#include "fake_results.h"

#include "wavefount/core/doubts.h"
#include "wavefount/core/film.h"
#include "wavefount/core/wave.h"
#include "wavefount/tables/csv_writer.h"
#include "wavefount/tables/gather.h"
#include "wavefount/tables/table_source.h"
#include "wavefount/tables/workbook.h"

namespace wavefount::fake {
namespace {

void make_ambiguous(Wave& wave) {
  wave.answer = Answer::ambiguous;
  wave.site.reset();
  wave.origins.front().claimed = false;
  wave.origins.front().probability = 0.6;
  wave.review = true;
  wave.reasons = {"two candidates", "few nuclei"};
  wave.reason_details = {"Two places are about equally likely.", "It rests on \"six\" nuclei."};
}

std::vector<Scene> scenes() {
  std::vector<Scene> scenes(6);
  scenes[0].name = "=SUM(A1)";
  scenes[1].name = "film 2, thin \"tube\"";
  scenes[1].speed_um_per_min = 22.5;
  scenes[2].name = "film 10 été";
  scenes[2].waves = 1;
  scenes[2].open_right = true;
  scenes[3].name = "long one";
  scenes[3].frames = 130;
  scenes[3].waves = 4;
  scenes[3].speed_um_per_min = 31;
  scenes[3].length_um = 3000;
  scenes[4].name = "empty tube";
  scenes[4].length_um = 100;
  scenes[5].name = "too short a film";
  scenes[5].frames = 6;
  return scenes;
}

}  // namespace

AcquisitionResult write_acquisition(const std::filesystem::path& folder, const Scene& scene) {
  auto records = records_of(scene);
  auto& film = records.edit<FilmDescription>();
  film.sheet_columns = {"batch", "tube_width_um"};
  film.sheet = {{"batch", "007"}, {"tube_width_um", "200"}};
  auto& waves = records.edit<Waves>().waves;
  if (waves.size() > 1) make_ambiguous(waves[1]);
  if (waves.size() > 3) waves[3].fate = Fate::terminal;
  records.put(Doubts{{{"focus", "Frames 10 to 14 are out of focus.", 0.2}}});
  Messages messages;
  messages.warn("The dark offset was estimated, so nc_ratio is empty.");
  const AcquisitionView view{records, scene.name, messages};
  const auto output = folder / scene.name;
  std::filesystem::create_directories(output);
  for (const auto& table : all_tables(view)) write_csv(table, output / (table.name + ".csv"));
  return {scene.name, output, true, messages.summary(), film.sheet, film.sheet_columns};
}

FolderWork write_results(const std::filesystem::path& folder, Messages& messages) {
  FolderWork work;
  work.output = folder;
  work.messages = &messages;
  for (const auto& scene : scenes()) work.acquisitions.push_back(write_acquisition(folder, scene));
  work.acquisitions.push_back({"broken",
                               {},
                               false,
                               "The file broken.tif is not a TIFF; export it again.",
                               {{"batch", "008"}, {"temperature_c", "-4.5"}},
                               {"batch", "temperature_c"}});
  gather_tables(work);
  write_workbook(folder, &messages);
  return work;
}

}  // namespace wavefount::fake
