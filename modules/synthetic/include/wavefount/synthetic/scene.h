#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/core/tube.h"

namespace wavefount {

/// One interphase of one nucleus as it truly is. Brightness is in counts above cytoplasm at even
/// light, meant over the nucleus' area.
struct SceneLife {
  int cycle = 0;          ///< number of the mitosis that ends it, the same along a wave
  double formed_min = 0;  ///< since the first frame; may lie before it
  double entry_min = 0;   ///< mitotic entry, or death where `dies`; may lie after the film
  bool dies = false;      ///< fades away instead of entering mitosis
  double fade_min = 0;    ///< time constant of the fading where it dies
  Point place_um;         ///< centre at formation
  Point velocity_um_per_min;
  double plateau = 0;          ///< counts
  double import_per_min = 0;   ///< filling rate constant k
  double first_radius_um = 0;  ///< at formation
  double last_radius_um = 0;   ///< approached exponentially
  double growth_per_min = 0;
  double leak_per_min = 0;      ///< share lost a minute before entry, over `leak_min`
  double leak_min = 0;          ///< how long before entry the leak begins
  double permeabilise_min = 0;  ///< time constant with which the content comes free at entry

  double radius_um(double time_min) const;
  /// Mean brightness of an intact nucleus: filling less leak.
  double brightness(double time_min) const;
  Point centre_um(double time_min) const;
};

/// One nucleus with all its interphases, in time order.
struct SceneNucleus {
  int number = 0;
  int tube = 0;         ///< index into Scene::tubes
  double along_um = 0;  ///< home
  double across_um = 0;
  std::vector<SceneLife> lives;
  double angle = 0;       ///< of its long axis, radians
  double elongation = 0;  ///< relative amplitude of the second harmonic of the outline
  double lobes = 0;       ///< relative amplitude of the third harmonic
  double texture = 0;     ///< relative amplitude of the brightness texture

  /// Outline over that of a disc of the same radius, in a direction of the image.
  double outline(double direction) const;
};

/// Where waves come from.
struct SceneSource {
  int tube = 0;
  double along_um = 0, across_um = 0;
  double first_min = 0;  ///< its first mitosis, cycle 1
  double period_min = 0;
  bool in_view = true;  ///< false: lies outside the image
};

struct SceneWaves {
  double speed_um_per_min = 25;
  double speed_change = 0;  ///< relative change of slowness from one cycle to the next
  bool together = false;    ///< all enter at once (first_min + n · period of source 0)
  double jitter_min = 0.4;  ///< of the nuclei around the front
  double mitosis_min = 9;   ///< from entry until the nucleus re-forms
  double mitosis_sd_min = 0.7;
  bool arrest = false;  ///< nuclei do not come back from wave `arrest_cycle`
  int arrest_cycle = 0;
};

struct SceneOptics {
  double psf_um = 1.6;                 ///< standard deviation of the point spread function
  double diffusion_um2_per_min = 250;  ///< of the reporter
  Optics optics = Optics::widefield;
  double section_um = 15;  ///< standard deviation of the optical section
  double cytoplasm = 240;  ///< counts inside the tube
  double surround = 25;    ///< counts outside
  double roundness = 0.4;  ///< 0: as bright at the walls as on the axis; 1: a round capillary
  double mottle = 0.03;    ///< relative amplitude of large-scale unevenness of the cytoplasm
  double dome = 0.25;      ///< see BlurredDisc
};

struct SceneCamera {
  double gain_electrons_per_count = 0.6;
  double read_noise_electrons = 1.8;
  double dark_offset_counts = 100;
  int bit_depth = 16;
};

struct Spot {
  Point place_um;
  double radius_um = 0;
  double brightness = 0;  ///< counts over what lies below
};

struct SceneNuisances {
  std::vector<Point> drift_um;  ///< one a frame, or empty; content lies at place + drift
  double vignetting = 0;        ///< relative loss of light at the corners
  double slope = 0;             ///< relative rise of light from left to right
  double bleaching_per_min = 0;
  double wall_glow = 0;            ///< counts on the walls
  double wall_glow_um = 4;         ///< standard deviation of the glowing rim
  std::vector<Spot> debris;        ///< static, bright
  std::vector<Spot> bubbles;       ///< dark, with a rim; brightness is the rim's
  std::vector<double> defocus_um;  ///< one a frame, or empty: standard deviation of added blur
};

/// A film with known truth, described in full: the same scene gives the same bytes.
struct Scene {
  std::string name;
  std::uint64_t seed = 1;
  int width = 0, height = 0;  ///< pixels
  double pixel_um = 1.3;
  std::vector<double> times_min;  ///< one a frame, since the first
  std::vector<Tube> tubes;        ///< outline, axis, width, ends; µm in the first frame's image
  std::vector<SceneNucleus> nuclei;
  std::vector<SceneSource> sources;
  SceneWaves waves;
  SceneOptics optics;
  SceneCamera camera;
  SceneNuisances nuisances;

  int frames() const { return static_cast<int>(times_min.size()); }
  Point drift_um(int frame) const;
  /// Light that reaches the camera from a place in the image over that of its brightest place.
  double evenness(Point image_um) const;
};

/// The point that lies at a place along and across a tube: the inverse of Tube::place. The axis is
/// continued beyond its ends.
Point point_at(const Tube& tube, double along_um, double across_um);

}  // namespace wavefount
