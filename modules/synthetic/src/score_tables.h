#pragma once

#include <filesystem>
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "wavefount/core/film.h"

namespace wavefount {

/// A nucleus of one acquisition.
struct NucleusKey {
  int acquisition = 0;  ///< index into ResultFilm::acquisitions; 0 in the truth
  int nucleus = 0;
  auto operator<=>(const NucleusKey&) const = default;
};

struct TruthPoint {
  int nucleus = 0, cycle = 0;
  Point place_px;
  double radius_um = 0;
  bool faint = false;
};

struct TruthEntry {
  int nucleus = 0, tube = 0, cycle = 0;
  std::optional<int> wave;
  double entry_min = 0, import_rate = 0, import_initial = 0, radius_um = 0;
  Point place_um;
  bool entered = false, counts = false, seen = false;
};

struct TruthWaveRow {
  int tube = 0, wave = 0;
  std::string answer;  ///< empty: nothing in particular is asked for
  std::string fate;
  bool travelling = false;
  int nuclei = 0;
  std::optional<double> speed;
};

struct TruthOriginRow {
  int tube = 0, wave = 0;
  Point place_um;
  std::string site;
  bool in_view = false, judged = false;
};

struct TruthFilm {
  std::string name;
  double pixel_um = 0, interval_min = 0;
  std::vector<double> spacing_um;  ///< by tube
  std::vector<std::vector<TruthPoint>> frames;
  std::vector<TruthEntry> entries;
  std::vector<TruthWaveRow> waves;
  std::vector<TruthOriginRow> origins;
};

struct ResultPoint {
  NucleusKey key;
  Point place_px;
};

struct ResultEntry {
  NucleusKey key;
  std::optional<int> wave;
  double entry_min = 0;
  std::optional<double> entry_se, import_rate, import_rate_se, import_initial, import_initial_se;
  Point place_um;
};

struct ResultWave {
  int acquisition = 0, wave = 0;
  std::string answer, fate;
  std::optional<double> speed, speed_lo, speed_hi;
};

struct ResultOrigin {
  int acquisition = 0, wave = 0;
  Point place_um;
  std::string site;
};

struct ResultFilm {
  std::vector<std::string> acquisitions;
  std::map<int, std::vector<ResultPoint>> frames;  ///< found ones only
  std::vector<ResultEntry> entries;
  std::vector<ResultWave> waves;
  std::vector<ResultOrigin> origins;  ///< claimed ones only
};

/// Every film of a truth folder, by name. Throws Problem when there is none.
std::vector<TruthFilm> read_truth(const std::filesystem::path& truth);

/// The results that belong to films of the given names; `FILM/tube-2` belongs to FILM. Acquisitions
/// without truth, and tables that are missing, are told in `notes`. Throws Problem when the folder
/// holds no tables at all.
std::map<std::string, ResultFilm> read_results(const std::filesystem::path& results,
                                               const std::vector<TruthFilm>& truth,
                                               std::vector<std::string>& notes);

}  // namespace wavefount
