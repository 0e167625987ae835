#include <algorithm>
#include <map>

#include "wavefount/synthetic/truth.h"
#include "wavefount/tables/csv_writer.h"

namespace wavefount {
namespace {

using Row = std::vector<Cell>;

std::string yes_no(bool value) {
  return value ? "yes" : "no";
}
std::string name_of(Boundary boundary) {
  return boundary == Boundary::open ? "open" : "closed";
}

template <typename Value>
Cell optional_cell(const std::optional<Value>& value) {
  return value ? Cell(*value) : Cell();
}
Cell whole(int value) {
  return static_cast<std::int64_t>(value);
}

Table table(std::string name, const std::vector<std::string>& texts,
            const std::vector<std::string>& numbers) {
  Table made{std::move(name), {}, {}};
  for (const auto& column : texts)
    made.columns.push_back({column, column, ColumnKind::text, 0, ""});
  for (const auto& column : numbers)
    made.columns.push_back({column, column, ColumnKind::number, 4, ""});
  return made;
}

Table film_table(const Scene& scene) {
  auto made = table("film", {"acquisition"},
                    {"pixel_um", "frames", "frame_interval_min", "width_px", "height_px"});
  FilmDescription film;
  film.times_min = scene.times_min;
  made.rows.push_back(Row{scene.name, scene.pixel_um, whole(scene.frames()),
                          film.frame_interval_min(), whole(scene.width), whole(scene.height)});
  return made;
}

Table tubes_table(const Scene& scene) {
  auto made = table("tubes", {"acquisition", "left_end", "right_end"},
                    {"tube", "width_um", "length_um", "spacing_um"});
  for (const auto& tube : scene.tubes)
    made.rows.push_back(Row{scene.name, name_of(tube.left_end), name_of(tube.right_end),
                            whole(tube.index), tube.width_um, tube.length_um,
                            median_spacing_um(scene, tube.index)});
  return made;
}

Table nuclei_table(const Scene& scene) {
  auto made = table("nuclei", {"acquisition"},
                    {"nucleus", "tube", "x_um", "y_um", "along_um", "across_um"});
  for (const auto& nucleus : scene.nuclei) {
    const auto& tube = scene.tubes[static_cast<std::size_t>(nucleus.tube)];
    const auto home = point_at(tube, nucleus.along_um, nucleus.across_um);
    made.rows.push_back(Row{scene.name, whole(nucleus.number), whole(nucleus.tube), home.x, home.y,
                            nucleus.along_um, nucleus.across_um});
  }
  return made;
}

Table traces_table(const Scene& scene) {
  auto made = table("traces", {"acquisition", "visible"},
                    {"nucleus", "cycle", "frame", "time_min", "x_px", "y_px", "x_um", "y_um",
                     "radius_um", "brightness"});
  for (const auto& nucleus : scene.nuclei)
    for (const auto& life : nucleus.lives)
      for (int frame = 0; frame < scene.frames(); ++frame) {
        const auto shows = showing(scene, life, frame);
        if (shows == Showing::no) continue;
        const double time = scene.times_min[static_cast<std::size_t>(frame)];
        const auto place = life.centre_um(time);
        const auto drift = scene.drift_um(frame);
        made.rows.push_back(Row{scene.name, std::string(shows == Showing::yes ? "yes" : "faint"),
                                whole(nucleus.number), whole(life.cycle), whole(frame), time,
                                (place.x + drift.x) / scene.pixel_um,
                                (place.y + drift.y) / scene.pixel_um, place.x, place.y,
                                life.radius_um(time), life.brightness(time)});
      }
  return made;
}

std::string outcome_of(const Scene& scene, const SceneLife& life) {
  if (life.entry_min > scene.times_min.back()) return "unfinished";
  return life.dies ? "lost" : "entered";
}

Table entries_table(const Scene& scene, const std::vector<TruthWave>& waves) {
  auto made =
      table("entries", {"acquisition", "start", "outcome", "counts"},
            {"nucleus", "tube", "cycle", "wave", "formed_min", "entry_min", "import_rate_per_min",
             "import_initial", "plateau", "radius_um", "x_um", "y_um"});
  std::map<std::pair<int, int>, int> wave_numbers;
  for (const auto& wave : waves) wave_numbers[{wave.tube, wave.cycle}] = wave.number;
  for (const auto& nucleus : scene.nuclei)
    for (const auto& life : nucleus.lives) {
      if (life.entry_min < 0) continue;
      const double end = std::min(life.entry_min, scene.times_min.back());
      const auto place = life.centre_um(end);
      const double even = scene.evenness(place);
      const auto wave = wave_numbers.find({nucleus.tube, life.cycle});
      const bool entered = outcome_of(scene, life) == "entered";
      made.rows.push_back(
          Row{scene.name, std::string(life.formed_min > 0 ? "seen" : "already-present"),
              outcome_of(scene, life), yes_no(entry_counts(scene, life)), whole(nucleus.number),
              whole(nucleus.tube), whole(life.cycle),
              entered && wave != wave_numbers.end() ? whole(wave->second) : Cell(), life.formed_min,
              life.entry_min, life.import_per_min, life.plateau * life.import_per_min * even,
              life.plateau * even, life.radius_um(end), place.x, place.y});
    }
  return made;
}

Table waves_table(const Scene& scene, const std::vector<TruthWave>& waves) {
  auto made = table("waves", {"acquisition", "answer", "fate", "travelling", "complete"},
                    {"tube", "wave", "cycle", "nuclei", "speed_um_per_min", "origins_in_view"});
  for (const auto& wave : waves) {
    const auto seen = std::count_if(wave.origins.begin(), wave.origins.end(),
                                    [](const TruthOrigin& origin) { return origin.judged; });
    made.rows.push_back(Row{scene.name, wave.answer ? wavefount::name_of(*wave.answer) : "",
                            wavefount::name_of(wave.fate), yes_no(wave.travelling),
                            yes_no(wave.complete), whole(wave.tube), whole(wave.number),
                            whole(wave.cycle), whole(static_cast<int>(wave.nuclei.size())),
                            optional_cell(wave.speed_um_per_min), whole(static_cast<int>(seen))});
  }
  return made;
}

Table origins_table(const Scene& scene, const std::vector<TruthWave>& waves) {
  auto made = table("origins", {"acquisition", "site", "in_view", "watched", "judged"},
                    {"tube", "wave", "nucleus", "x_um", "y_um", "along_um", "across_um",
                     "first_min", "prominence_min", "basin_nuclei"});
  for (const auto& wave : waves)
    for (const auto& origin : wave.origins) {
      const auto& source = scene.sources[static_cast<std::size_t>(origin.source)];
      const auto place = point_at(scene.tubes[static_cast<std::size_t>(wave.tube)], source.along_um,
                                  source.across_um);
      made.rows.push_back(Row{scene.name, wavefount::name_of(origin.site), yes_no(source.in_view),
                              yes_no(origin.watched), yes_no(origin.judged), whole(wave.tube),
                              whole(wave.number), whole(origin.leader), place.x, place.y,
                              source.along_um, source.across_um, origin.first_min,
                              optional_cell(origin.prominence_min), whole(origin.basin_nuclei)});
    }
  return made;
}

void write_table(const Table& table, const std::filesystem::path& file) {
  CsvWriter writer(file);
  writer.header(table.columns);
  for (const auto& row : table.rows) writer.row(row);
  writer.commit();
}

}  // namespace

std::vector<Table> truth_tables(const Scene& scene) {
  const auto waves = truth_waves(scene);
  return {film_table(scene),          tubes_table(scene),          nuclei_table(scene),
          traces_table(scene),        entries_table(scene, waves), waves_table(scene, waves),
          origins_table(scene, waves)};
}

void write_truth(const Scene& scene, const std::filesystem::path& truth) {
  const auto folder = truth / scene.name;
  std::filesystem::create_directories(folder);
  for (const auto& table : truth_tables(scene)) write_table(table, folder / (table.name + ".csv"));
}

}  // namespace wavefount
