#pragma once

#include <optional>
#include <string>
#include <vector>

#include "wavefount/core/nucleus.h"

namespace wavefount {

enum class Start { seen, already_present };
enum class Outcome { entered, unfinished, lost };

/// Onset of rapid loss of the reporter: mitotic entry.
struct Entry {
  double time_min = 0;
  double se_min = 0;
  double half_loss_min = 0;
  std::string signal;  ///< on which signal it was fitted, in words
};

/// Filling of one nucleus: plateau · (1 − exp(−k (t − formed))), or a straight line.
struct ImportFit {
  bool curved = false;  ///< false: straight line was the better model; rate and plateau are empty
  std::optional<double> formed_min;
  std::optional<double> rate_per_min, rate_se_per_min;  ///< k
  double initial = 0, initial_se = 0;                   ///< plateau · k, counts/min
  std::optional<double> relative_per_min;               ///< initial over offset-corrected cytoplasm
  std::optional<double> total_per_min;  ///< initial rise of integrated light, counts/min
  std::optional<double> plateau;        ///< counts
  double start_min = 0;                 ///< time from which the fit holds, for brightness_at
  double level_at_start = 0;            ///< counts, of the straight line

  /// Fitted brightness at a time, counts.
  double brightness_at(double time_min) const;
};

/// One interphase of one nucleus; the row of the `cycles` table less what waves add.
struct Interphase {
  int nucleus = 0;                      ///< Nucleus::id
  int index = 0;                        ///< of the nucleus' interphases, from 0
  int first_frame = 0, last_frame = 0;  ///< where it was found
  Start start = Start::seen;
  Outcome outcome = Outcome::entered;
  std::optional<double> formed_min;
  std::optional<Entry> entry;
  std::optional<ImportFit> import;
  Point place_um;  ///< median over its last frames before entry
  double brightness_mean = 0, brightness_peak = 0;
  std::optional<double> nc_ratio_peak;
  double radius_um = 0;  ///< at its largest
  std::vector<std::string> notes;
};

struct Interphases {
  static constexpr const char* record_name = "interphases";
  std::vector<Interphase> interphases;  ///< by nucleus, then by time
};

/// Aperture traces by position in Nuclei::nuclei.
struct ApertureTraces {
  static constexpr const char* record_name = "aperture-traces";
  std::vector<ApertureTrace> traces;
};

}  // namespace wavefount
