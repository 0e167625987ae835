#pragma once

#include <cstdint>
#include <filesystem>
#include <map>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "wavefount/core/image.h"

namespace wavefount {

enum class Optics { widefield, sectioned };

/// Whether the tube's end or wall is in view (closed) or the tube runs out of the image (open).
enum class Boundary { closed, open };

struct Point {
  double x = 0;
  double y = 0;
};
using Polygon = std::vector<Point>;

struct InputFile {
  std::filesystem::path path;
  std::uint64_t bytes = 0;
  std::int64_t modified_ns = 0;  ///< modification time, since the epoch of the file clock
  std::string checksum;          ///< XXH3-128 in hexadecimal; empty until computed
};

/// What a sidecar says against the measurement, and what it keeps out.
struct FilmOverrides {
  std::optional<double> tube_width_um;
  std::optional<Boundary> left_end, right_end, upper_wall, lower_wall;
  Polygon outline_um;               ///< empty: measured
  std::vector<int> exclude_frames;  ///< from 0
  std::vector<Polygon> exclude_um;  ///< nothing inside is used
  std::optional<double> first_healthy_min, last_healthy_min;
};

/// Camera and optics as far as metadata or sidecar say; what is empty is estimated from the film.
struct CameraSettings {
  std::optional<double> gain_electrons_per_count;
  std::optional<double> read_noise_electrons;
  std::optional<double> dark_offset_counts;
};

/// One acquisition as it was understood before any pixel was read.
struct FilmDescription {
  static constexpr const char* record_name = "film";

  std::string name;              ///< acquisition name as in the tables
  std::filesystem::path source;  ///< the file or folder
  std::vector<InputFile> files;
  int width = 0;   ///< pixels
  int height = 0;  ///< pixels
  int frames = 0;
  int z_planes = 1;
  std::vector<std::string> channels;  ///< names, one an imaging channel
  int reporter = 0;                   ///< index into channels of the reporter that nuclei import
  int brightfield = -1;               ///< index or -1
  int field = -1;                     ///< index or -1: a tubulin or biosensor reporter
  int bit_depth = 16;                 ///< of the camera; 32 for float
  double pixel_um = 0;                ///< µm a pixel
  std::vector<double> times_min;      ///< since the first frame, strictly rising, one a frame
  double exposure_min = 0;            ///< 0 when unknown or short
  Optics optics = Optics::widefield;
  CameraSettings camera;
  FilmOverrides overrides;
  std::map<std::string, std::string> sheet;  ///< the acquisition's row of the sheet, by column
  std::vector<std::string> sheet_columns;    ///< their order
  std::vector<std::string> notes;            ///< what was assumed or left out, in sentences

  /// Median step of times_min, minutes; 0 for a single frame.
  double frame_interval_min() const;
};

/// Reads planes; one a worker, not thread-safe itself.
class FrameReader {
 public:
  virtual ~FrameReader();
  /// Pixels of one plane as counts. Throws Problem for a plane that cannot be read.
  virtual ImagePointer read(int frame, int channel, int z) = 0;
};

/// An opened film. `description()` and `reader()` may be called from any thread.
class FrameSource {
 public:
  virtual ~FrameSource();
  virtual const FilmDescription& description() const = 0;
  virtual std::unique_ptr<FrameReader> reader() const = 0;
};

}  // namespace wavefount
