#pragma once

#include <optional>
#include <string>
#include <vector>

namespace wavefount {

enum class Fate { confirmed, terminal, unconfirmed };
enum class Answer { too_few, synchronous, incoherent, enters_view, coexisting, single, ambiguous };
enum class Site { end, wall, interior, view_edge };
enum class Timing { leads, with_front, lags, out_of_step, alone, none };

std::string name_of(Fate fate);
std::string name_of(Answer answer);
std::string name_of(Site site);
std::string name_of(Timing timing);

/// Slowness dt/dx with its 95 % interval carried over to the speed. Signed along the direction.
struct Slowness {
  double min_per_um = 0;
  double se_min_per_um = 0;
  std::optional<double> speed_um_per_min;  ///< empty when the interval of slowness holds zero
  std::optional<double> speed_lo_um_per_min;
  std::optional<double> speed_hi_um_per_min;  ///< empty: no upper limit
};

/// One entry as the waves use it.
struct WaveEntry {
  int interphase = 0;  ///< position in Interphases::interphases
  int nucleus = 0;     ///< Nucleus::id
  int cycle = 0;       ///< unwrapped over the neighbours, from 1
  int wave = 0;        ///< Wave::number, 0 when in none
  double time_min = 0, se_min = 0;
  double x_um = 0, y_um = 0, along_um = 0, across_um = 0;
  std::optional<double> neighbour_delay_min, neighbour_delay_se_min;
  Timing timing = Timing::none;
  std::optional<double> lead_probability;
  std::optional<double> brightness_at_age;  ///< counts, at the wave's common age
  std::vector<int> neighbours;              ///< positions in WaveEntries::entries, same wave
};

struct WaveEntries {
  static constexpr const char* record_name = "wave-entries";
  std::vector<WaveEntry> entries;
};

/// One candidate origin of one wave.
struct Origin {
  int number = 0;  ///< from 1 within its wave, most probable first
  bool claimed = false;
  double probability = 0;
  int nucleus = 0;  ///< Nucleus::id of the leading one there
  double x_um = 0, y_um = 0, along_um = 0, across_um = 0;
  double position_se_um = 0;
  double entry_min = 0;
  std::optional<double> prominence_min, prominence_se_min;  ///< empty for the earliest
  int basin_nuclei = 0;
  Site site = Site::interior;
  std::optional<double> chance_of_site, chance_of_site_smooth;
  std::optional<double> brightness_percentile, import_percentile, territory_percentile;
  std::optional<double> period_ratio, period_ratio_slowest;
};

/// One arm of one wave: from an origin (or an open edge) outwards in one direction.
struct Front {
  int origin = 0;                   ///< Origin::number, 0 when it comes from outside the view
  std::string direction;            ///< left, right, inwards, outwards
  double from_um = 0, to_um = 0;    ///< along the tube
  double from_min = 0, to_min = 0;  ///< fitted times there
  int nuclei = 0;
  Slowness slowness;
};

struct Wave {
  int number = 0;  ///< from 1, by start
  int cycle = 0;
  std::vector<int> entries;  ///< positions in WaveEntries::entries
  double start_min = 0, end_min = 0;
  std::optional<double> period_min;  ///< median of its nuclei since the wave before
  Fate fate = Fate::unconfirmed;
  std::optional<Slowness> slowness;
  Answer answer = Answer::ambiguous;
  std::optional<Site> site;  ///< of the claimed origin, empty when none or when they differ
  std::vector<Front> fronts;
  std::vector<Origin> origins;
  double jitter_min = 0;                    ///< fitted scatter of nuclei around the front
  std::vector<std::string> reasons;         ///< short, for `waves.reasons`
  std::vector<std::string> reason_details;  ///< a sentence each, same order
  bool review = false;
};

struct Waves {
  static constexpr const char* record_name = "waves";
  std::vector<Wave> waves;
};

/// What the territory of each nucleus is; by position in Nuclei::nuclei, empty when not defined.
struct Territories {
  static constexpr const char* record_name = "territories";
  std::vector<std::optional<double>> territory_um2;
  std::vector<std::optional<double>> nearest_um;
};

}  // namespace wavefount
