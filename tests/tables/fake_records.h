#pragma once

#include <filesystem>
#include <string>

#include "wavefount/core/record_store.h"

namespace wavefount::fake {

/// A tube whose waves travel outwards from one place, described by closed formulas: what every
/// record holds follows from these numbers.
struct Scene {
  std::string name = "film";
  int frames = 60;
  double interval_min = 1;
  double pixel_um = 2;
  double length_um = 1500;
  double width_um = 200;
  double spacing_um = 120;
  double origin_um = 500;  ///< along the tube
  double speed_um_per_min = 40;
  double period_min = 25;
  double first_entry_min = 10;  ///< at the origin
  int waves = 2;
  bool upright = false;
  bool open_right = false;
  bool tube = true;     ///< false: the whole field stands for the tube
  int reduction = 2;    ///< factor of the reduced film
  double drift_px = 0;  ///< over the whole film, along x
};

/// All records of the scene as the measurement would leave them. `work_file`: where the reduced
/// film is kept; no reduced film is made when it is empty.
RecordStore records_of(const Scene& scene, const std::filesystem::path& work_file = {});

/// Only what `nuclei-only` makes: film, observations, tube, drift, nuclei.
RecordStore nuclei_only_records_of(const Scene& scene, const std::filesystem::path& work_file = {});

}  // namespace wavefount::fake
