#pragma once

#include <optional>
#include <string>
#include <vector>

#include "wavefount/core/film.h"

namespace wavefount {

/// One nucleus in one frame; the row of the `traces` table.
struct TracePoint {
  int frame = 0;
  double time_min = 0;
  bool found = false;         ///< false: measured at its place while not visible
  int sighting = -1;          ///< index into FrameObservation::sightings, -1 while not found
  double x_px = 0, y_px = 0;  ///< in that frame as recorded
  double x_um = 0, y_um = 0;  ///< drift removed
  double area_um2 = 0;
  double radius_um = 0;
  double brightness = 0;           ///< counts above local cytoplasm
  double brightness_variance = 0;  ///< counts²
  double cytoplasm = 0;            ///< counts, dark offset included
  double integrated = 0;           ///< counts
  bool doubtful = false;  ///< touching, saturated, at the border, out of focus: not for fits
};

/// The fixed-aperture signal at a nucleus' place, through formation and loss.
struct ApertureTrace {
  double radius_um = 0;
  double ring_from_um = 0;  ///< the surrounding is measured in a ring: released light reaches it
  double ring_to_um = 0;    ///< 0: none was taken off
  std::vector<int> frame;
  std::vector<double> time_min;
  std::vector<double> signal;    ///< mean over the aperture above the surrounding, counts
  std::vector<double> variance;  ///< of `signal` under the camera's noise, counts²
};

enum class Kinship { none, division, fusion, fragment };

/// One nucleus followed through the film, over its mitoses.
struct Nucleus {
  int id = 0;  ///< `nucleus` of the tables, from 1
  std::vector<int> parents;
  Kinship kinship = Kinship::none;
  std::vector<TracePoint> points;  ///< by frame; found ones and those in between
  std::vector<std::string> notes;
};

struct Nuclei {
  static constexpr const char* record_name = "nuclei";
  std::vector<Nucleus> nuclei;
  double mitosis_min = 0;  ///< film's median time between loss and re-formation; 0 when not seen
};

}  // namespace wavefount
