#pragma once

#include "wavefount/core/film.h"
#include "wavefount/core/messages.h"
#include "wavefount/core/prescan.h"

namespace wavefount::tube {

struct ScanSettings {
  int frames = 32;                ///< read at most
  int noise_pairs = 8;            ///< of frames that follow one another, at most
  double smallest_radius_um = 4;  ///< of a nucleus to be found
  double largest_radius_um = 25;  ///< of a nucleus, kept out of what stands still
};

struct ScanResult {
  Prescan prescan;
  CameraModel camera;
};

/// Side of the square of pixels that may become one without losing the smallest nuclei: a blob is
/// still found when its radius is 1.5 reduced pixels. At most what leaves 32 reduced pixels on the
/// shorter side.
int reduction_factor(const FilmDescription& film, double smallest_radius_um);

/// The reporter's pixels of one frame, z planes summed. Throws Problem.
ImagePointer read_summed(FrameReader& reader, const FilmDescription& film, int frame);

/// Why a frame is of no use by itself (one value everywhere, too many values that are not finite),
/// a sentence; empty when it is of use.
std::string blank_problem(const Image& reduced);

/// Sets the pixels that are not finite to the median of the others (0 when there are none). True
/// when there were any.
bool mend(Image& image);

/// Reads a few frames ahead of the stream. Throws Problem when no frame is usable.
ScanResult scan_ahead(const FrameSource& source, const ScanSettings& settings, Messages& messages);

}  // namespace wavefount::tube
