#pragma once

#include <cstdint>
#include <vector>

#include "wavefount/core/nucleus.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/tube.h"

namespace wavefount::testing {

/// A film of points instead of pixels: what a detector would report of cycling nuclei, with known
/// truth.
struct PointFilmPlan {
  std::uint32_t seed = 1;
  double length_um = 2000, width_um = 250;
  double spacing_um = 140;
  int frames = 400;
  double interval_min = 1;
  bool irregular = false;             ///< stamps off by up to a third of an interval
  double dropped_share = 0;           ///< unusable frames
  double interphase_min = 28;         ///< of the first cycle; grows by a twentieth a cycle
  double mitosis_min = 9;             ///< true time out of sight
  double slowness_min_per_um = 0.03;  ///< of the wave; 0: all together
  double jitter_min = 0.7;            ///< of entries around the wave
  double displacement_um = 10;        ///< through mitosis, standard deviation an axis
  double far_share = 0.05;            ///< mitoses with three times that
  double wander_um = 0.6;             ///< random walk a square root of a minute
  double centroid_um = 0.4;           ///< error of a place
  double flow_um_per_min = 0.5;       ///< amplitude
  double missed_share = 0.05;
  double false_share = 0.02;
  double death_share = 0.02;  ///< of mitoses that are the last
  int newborn = 2;            ///< nuclei that first form during the film
  int debris = 2;
  double cloud_share = 0.3;  ///< releases seen as a fading cloud for a while
  int jumps = 0;             ///< stage jumps, reported, corrected but for a rest
  double jump_rest_um = 0;
  int hidden_jumps = 0;       ///< neither reported nor corrected
  double division_share = 0;  ///< of mitoses with a second nucleus coming out
};

/// Who each sighting is.
struct TrueSighting {
  int nucleus = -1;     ///< −1 false alarm, −2 debris, −3 cloud
  int interphase = -1;  ///< of that nucleus, from 0
};

struct PointFilm {
  FilmDescription film;
  Observations observations;
  Drift drift;
  Tube tube;
  std::vector<std::vector<TrueSighting>> truth;  ///< by frame, sighting
  std::vector<int> mother;                       ///< by nucleus, −1 when none
  std::vector<double> mitoses_min;               ///< true times out of sight
};

PointFilm make_point_film(const PointFilmPlan& plan);

/// How well nuclei were followed.
struct LinkScore {
  int links = 0, links_right = 0;      ///< successive sightings within an interphase
  int mitoses = 0, mitoses_right = 0;  ///< identity kept from an interphase to the next
  int mitoses_swapped = 0;             ///< of the others, those that went on as another nucleus
  int nuclei = 0, nuclei_invented = 0;
  int debris_kept = 0;
  int sightings = 0, sightings_lost = 0;  ///< of nuclei, in no trace
  int false_kept = 0;                     ///< false alarms in a trace

  LinkScore& operator+=(const LinkScore& other);
  double link_share() const { return links == 0 ? 1 : double(links_right) / links; }
  double mitosis_share() const { return mitoses == 0 ? 1 : double(mitoses_right) / mitoses; }
};

LinkScore score_links(const PointFilm& made, const Nuclei& nuclei);

}  // namespace wavefount::testing
