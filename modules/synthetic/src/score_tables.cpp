#include "score_tables.h"

#include <algorithm>
#include <set>

#include "table_rows.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

namespace fs = std::filesystem;

Point place(const TableRow& row, std::string_view x, std::string_view y) {
  return {row.required(x), row.required(y)};
}

void read_film(const fs::path& folder, TruthFilm& film) {
  each_row(folder / "film.csv", [&](const TableRow& row) {
    film.name = row.text("acquisition");
    film.pixel_um = row.required("pixel_um");
    film.interval_min = row.required("frame_interval_min");
    constexpr int most_frames = 1000000;
    const int frames = row.required_integer("frames");
    if (frames < 1 || frames > most_frames)
      throw Problem("the truth in " + folder.string() + " has an absurd number of frames.");
    film.frames.resize(static_cast<std::size_t>(frames));
  });
  each_row(folder / "tubes.csv",
           [&](const TableRow& row) { film.spacing_um.push_back(row.required("spacing_um")); });
}

void read_points(const fs::path& folder, TruthFilm& film) {
  each_row(folder / "traces.csv", [&](const TableRow& row) {
    const auto frame = static_cast<std::size_t>(row.required_integer("frame"));
    if (frame >= film.frames.size())
      throw Problem("the truth in " + folder.string() + " has a frame outside its film.");
    film.frames[frame].push_back({row.required_integer("nucleus"), row.required_integer("cycle"),
                                  place(row, "x_px", "y_px"), row.required("radius_um"),
                                  row.text("visible") == "faint"});
  });
}

void read_entries(const fs::path& folder, TruthFilm& film) {
  each_row(folder / "entries.csv", [&](const TableRow& row) {
    TruthEntry entry;
    entry.nucleus = row.required_integer("nucleus");
    entry.tube = row.required_integer("tube");
    entry.cycle = row.required_integer("cycle");
    entry.wave = row.integer("wave");
    entry.entry_min = row.required("entry_min");
    entry.import_rate = row.required("import_rate_per_min");
    entry.import_initial = row.required("import_initial");
    entry.radius_um = row.required("radius_um");
    entry.place_um = place(row, "x_um", "y_um");
    entry.entered = row.text("outcome") == "entered";
    entry.counts = row.yes("counts");
    entry.seen = row.text("start") == "seen";
    film.entries.push_back(entry);
  });
}

void read_waves(const fs::path& folder, TruthFilm& film) {
  each_row(folder / "waves.csv", [&](const TableRow& row) {
    film.waves.push_back({row.required_integer("tube"), row.required_integer("wave"),
                          row.text("answer"), row.text("fate"), row.yes("travelling"),
                          row.required_integer("nuclei"), row.number("speed_um_per_min")});
  });
  each_row(folder / "origins.csv", [&](const TableRow& row) {
    film.origins.push_back({row.required_integer("tube"), row.required_integer("wave"),
                            place(row, "x_um", "y_um"), row.text("site"), row.yes("in_view"),
                            row.yes("judged")});
  });
}

/// Takes back the apostrophe that keeps a spreadsheet from reading a name as a formula.
std::string unguarded(std::string name) {
  if (name.size() > 1 && name[0] == '\'' &&
      std::string_view("=+-@").find(name[1]) != std::string_view::npos)
    name.erase(0, 1);
  return name;
}

class ResultReader {
 public:
  ResultReader(const std::vector<TruthFilm>& truth, std::vector<std::string>& notes)
      : notes_(notes) {
    for (const auto& film : truth) names_.insert(film.name);
  }

  void read(const fs::path& root) {
    read_table(root, "traces", [this](const TableRow& row, ResultFilm& film, int acquisition) {
      take_point(row, film, acquisition);
    });
    read_table(root, "cycles", [this](const TableRow& row, ResultFilm& film, int acquisition) {
      take_entry(row, film, acquisition);
    });
    read_table(root, "waves", [](const TableRow& row, ResultFilm& film, int acquisition) {
      film.waves.push_back({acquisition, row.required_integer("wave"), row.text("answer"),
                            row.text("fate"), row.number("speed_um_per_min"),
                            row.number("speed_lo_um_per_min"), row.number("speed_hi_um_per_min")});
    });
    read_table(root, "origins", [](const TableRow& row, ResultFilm& film, int acquisition) {
      if (!row.yes("claimed")) return;
      film.origins.push_back({acquisition, row.required_integer("wave"), place(row, "x_um", "y_um"),
                              row.text("site")});
    });
    if (tables_ == 0)
      throw Problem("the folder " + root.string() +
                    " holds no results; name the folder that `run` was told to write to.");
  }

  std::map<std::string, ResultFilm> films;

 private:
  template <typename Take>
  void read_table(const fs::path& root, const std::string& table, Take take) {
    const auto files = files_of(root, table + ".csv");
    if (files.empty()) notes_.push_back("there is no table " + table + ".csv.");
    for (const auto& file : files) {
      ++tables_;
      each_row(file, [&](const TableRow& row) {
        const auto acquisition = unguarded(row.text("acquisition"));
        const auto film = film_of(acquisition);
        if (film.empty()) return;
        auto& result = films[film];
        take(row, result, number_of(result, acquisition));
      });
    }
  }

  static std::vector<fs::path> files_of(const fs::path& root, const std::string& name) {
    if (fs::is_regular_file(root / name)) return {root / name};
    std::vector<fs::path> files;
    std::error_code error;
    for (fs::recursive_directory_iterator at(root, error), end; !error && at != end;
         at.increment(error))
      if (at->is_regular_file() && at->path().filename() == name) files.push_back(at->path());
    std::sort(files.begin(), files.end());
    return files;
  }

  /// The film an acquisition belongs to; empty, and noted once, where there is no truth for it.
  std::string film_of(const std::string& acquisition) {
    if (names_.count(acquisition)) return acquisition;
    const auto slash = acquisition.rfind("/tube-");
    if (slash != std::string::npos && names_.count(acquisition.substr(0, slash)))
      return acquisition.substr(0, slash);
    if (unknown_.insert(acquisition).second)
      notes_.push_back("there is no truth for " + acquisition + "; it is left out.");
    return {};
  }

  static int number_of(ResultFilm& film, const std::string& acquisition) {
    auto& names = film.acquisitions;
    const auto found = std::find(names.begin(), names.end(), acquisition);
    if (found != names.end()) return static_cast<int>(found - names.begin());
    names.push_back(acquisition);
    return static_cast<int>(names.size()) - 1;
  }

  static void take_point(const TableRow& row, ResultFilm& film, int acquisition) {
    if (!row.yes("found")) return;
    film.frames[row.required_integer("frame")].push_back(
        {{acquisition, row.required_integer("nucleus")}, place(row, "x_px", "y_px")});
  }

  static void take_entry(const TableRow& row, ResultFilm& film, int acquisition) {
    if (row.text("outcome") != "entered") return;
    ResultEntry entry;
    entry.key = {acquisition, row.required_integer("nucleus")};
    entry.wave = row.integer("wave");
    entry.entry_min = row.required("entry_min");
    entry.entry_se = row.number("entry_se_min");
    entry.import_rate = row.number("import_rate_per_min");
    entry.import_rate_se = row.number("import_rate_se_per_min");
    entry.import_initial = row.number("import_initial");
    entry.import_initial_se = row.number("import_initial_se");
    entry.place_um = place(row, "x_um", "y_um");
    film.entries.push_back(entry);
  }

  std::set<std::string> names_, unknown_;
  std::vector<std::string>& notes_;
  int tables_ = 0;
};

}  // namespace

std::vector<TruthFilm> read_truth(const fs::path& truth) {
  std::error_code error;
  std::vector<fs::path> folders;
  for (fs::directory_iterator at(truth, error), end; !error && at != end; at.increment(error))
    if (fs::is_regular_file(at->path() / "film.csv")) folders.push_back(at->path());
  if (folders.empty())
    throw Problem("the folder " + truth.string() +
                  " holds no truth; name the folder `truth` that `demo` wrote.");
  std::sort(folders.begin(), folders.end(), [](const fs::path& a, const fs::path& b) {
    return natural_less(a.filename().string(), b.filename().string());
  });
  std::vector<TruthFilm> films;
  for (const auto& folder : folders) {
    auto& film = films.emplace_back();
    read_film(folder, film);
    read_points(folder, film);
    read_entries(folder, film);
    read_waves(folder, film);
  }
  return films;
}

std::map<std::string, ResultFilm> read_results(const fs::path& results,
                                               const std::vector<TruthFilm>& truth,
                                               std::vector<std::string>& notes) {
  if (!fs::is_directory(results)) throw Problem("there is no folder " + results.string() + ".");
  ResultReader reader(truth, notes);
  reader.read(results);
  return std::move(reader.films);
}

}  // namespace wavefount
