#pragma once

#include <filesystem>
#include <optional>
#include <vector>

#include "wavefount/core/table.h"
#include "wavefount/core/wave.h"
#include "wavefount/synthetic/scene.h"

namespace wavefount {

/// How well a nucleus shows in a frame. `faint` is what nobody can be right or wrong about: just
/// formed, just emptied, dying, or cut by the image's edge.
enum class Showing { no, faint, yes };

/// A nucleus shows when its contrast reaches one pixel's noise and, summed over its area, eight
/// times the noise of that sum.
Showing showing(const Scene& scene, const SceneLife& life, int frame);

/// Whether an entry can be asked of a measurement: in the film with a few frames before and after
/// it, in the image with its whole disc, and visible before.
bool entry_counts(const Scene& scene, const SceneLife& life);

/// Median distance to the nearest other nucleus of a tube, µm; 0 with fewer than two.
double median_spacing_um(const Scene& scene, int tube);

/// One source as one wave shows it.
struct TruthOrigin {
  int source = 0;   ///< index into Scene::sources
  int leader = -1;  ///< number of the nucleus nearest to it, -1 when there is none in its basin
  double first_min = 0;                  ///< when the field starts there
  int basin_nuclei = 0;                  ///< nuclei in view that it reaches first
  std::optional<double> prominence_min;  ///< empty for the earliest
  bool judged = false;   ///< in view, watched, and prominent enough that it must be found
  bool watched = false;  ///< its first nuclei enter while the film runs
  Site site = Site::interior;
};

struct TruthWave {
  int tube = 0;
  int number = 0;  ///< from 1 within the tube
  int cycle = 0;
  std::vector<int> nuclei;  ///< whose entry counts
  Fate fate = Fate::unconfirmed;
  bool travelling = false;  ///< a speed can be asked for; never of a terminal wave
  bool complete = false;    ///< every nucleus in view enters while the film runs
  std::optional<double> speed_um_per_min;
  std::optional<Answer> answer;  ///< empty: nothing in particular can be asked for
  std::vector<TruthOrigin> origins;
};

/// Waves with at least one entry that counts, by tube and cycle.
std::vector<TruthWave> truth_waves(const Scene& scene);

/// The truth of a scene as tables: `tubes`, `nuclei`, `traces`, `entries`, `waves`, `origins`.
std::vector<Table> truth_tables(const Scene& scene);

/// Writes them as TRUTH/NAME/TABLE.csv. Throws Problem.
void write_truth(const Scene& scene, const std::filesystem::path& truth);

/// Writes TRUTH/NAME/labels.tif: a page a frame, 0 background, nucleus + 1 inside the true outlines
/// of nuclei that show. Throws Problem.
void write_truth_labels(const Scene& scene, const std::filesystem::path& truth);

}  // namespace wavefount
