#include "perfect_results.h"

#include <fstream>

#include "wavefount/core/text.h"
#include "wavefount/synthetic/truth.h"

namespace wavefount {
namespace {

std::string acquisition_of(const Scene& scene, int tube) {
  return tube == 0 ? scene.name : scene.name + "/tube-" + std::to_string(tube + 1);
}

std::vector<Cells> traces_of(const Scene& scene) {
  std::vector<Cells> rows;
  for (const auto& nucleus : scene.nuclei)
    for (const auto& life : nucleus.lives)
      for (int frame = 0; frame < scene.frames(); ++frame) {
        if (showing(scene, life, frame) != Showing::yes) continue;
        const auto place = life.centre_um(scene.times_min[static_cast<std::size_t>(frame)]);
        const auto drift = scene.drift_um(frame);
        rows.push_back({{"acquisition", acquisition_of(scene, nucleus.tube)},
                        {"nucleus", std::to_string(nucleus.number)},
                        {"frame", std::to_string(frame)},
                        {"found", "yes"},
                        {"x_px", number_text((place.x + drift.x) / scene.pixel_um)},
                        {"y_px", number_text((place.y + drift.y) / scene.pixel_um)}});
      }
  return rows;
}

Cells cycle_row(const Scene& scene, const SceneNucleus& nucleus, const SceneLife& life, int wave) {
  const auto place = life.centre_um(life.entry_min);
  const double initial = life.plateau * life.import_per_min * scene.evenness(place);
  return {{"acquisition", acquisition_of(scene, nucleus.tube)},
          {"nucleus", std::to_string(nucleus.number)},
          {"wave", std::to_string(wave)},
          {"outcome", "entered"},
          {"entry_min", number_text(life.entry_min)},
          {"entry_se_min", "0.1"},
          {"x_um", number_text(place.x)},
          {"y_um", number_text(place.y)},
          {"import_rate_per_min", number_text(life.import_per_min)},
          {"import_rate_se_per_min", "0.005"},
          {"import_initial", number_text(initial)},
          {"import_initial_se", "1"}};
}

void add_waves(const Scene& scene, ResultTables& tables) {
  for (const auto& wave : truth_waves(scene)) {
    const auto acquisition = acquisition_of(scene, wave.tube);
    const auto number = std::to_string(wave.number);
    for (const auto& nucleus : scene.nuclei)
      for (const auto& life : nucleus.lives)
        if (nucleus.tube == wave.tube && life.cycle == wave.cycle && entry_counts(scene, life))
          tables["cycles"].push_back(cycle_row(scene, nucleus, life, wave.number));
    const auto speed = wave.speed_um_per_min.value_or(0);
    const bool given = wave.travelling;
    tables["waves"].push_back({{"acquisition", acquisition},
                               {"wave", number},
                               {"answer", name_of(wave.answer.value_or(Answer::ambiguous))},
                               {"fate", name_of(wave.fate)},
                               {"speed_um_per_min", given ? number_text(speed) : ""},
                               {"speed_lo_um_per_min", given ? number_text(0.9 * speed) : ""},
                               {"speed_hi_um_per_min", given ? number_text(1.1 * speed) : ""}});
    for (const auto& origin : wave.origins) {
      if (!origin.judged) continue;
      const auto& source = scene.sources[static_cast<std::size_t>(origin.source)];
      const auto place = point_at(scene.tubes[static_cast<std::size_t>(wave.tube)], source.along_um,
                                  source.across_um);
      tables["origins"].push_back({{"acquisition", acquisition},
                                   {"wave", number},
                                   {"claimed", "yes"},
                                   {"x_um", number_text(place.x)},
                                   {"y_um", number_text(place.y)},
                                   {"site", name_of(origin.site)}});
    }
  }
}

const std::map<std::string, std::vector<std::string>> columns = {
    {"traces", {"acquisition", "nucleus", "frame", "found", "x_px", "y_px"}},
    {"cycles",
     {"acquisition", "nucleus", "wave", "outcome", "entry_min", "entry_se_min", "x_um", "y_um",
      "import_rate_per_min", "import_rate_se_per_min", "import_initial", "import_initial_se"}},
    {"waves",
     {"acquisition", "wave", "answer", "fate", "speed_um_per_min", "speed_lo_um_per_min",
      "speed_hi_um_per_min"}},
    {"origins", {"acquisition", "wave", "claimed", "x_um", "y_um", "site"}}};

}  // namespace

ResultTables perfect_results(const Scene& scene) {
  ResultTables tables;
  tables["traces"] = traces_of(scene);
  add_waves(scene, tables);
  return tables;
}

void write_results(const ResultTables& tables, const std::filesystem::path& folder) {
  std::filesystem::create_directories(folder);
  for (const auto& [name, header] : columns) {
    std::ofstream out(folder / (name + ".csv"), std::ios::binary);
    out << joined(header, ",") << "\r\n";
    const auto table = tables.find(name);
    if (table == tables.end()) continue;
    for (const auto& row : table->second) {
      std::vector<std::string> cells;
      for (const auto& column : header) cells.push_back(row.at(column));
      out << joined(cells, ",") << "\r\n";
    }
  }
}

}  // namespace wavefount
