#pragma once

#include <string>
#include <vector>

#include "ome_metadata.h"
#include "sidecar.h"

namespace wavefount {

/// What the film's times are taken from.
struct TimeSources {
  std::string film;  ///< name of the acquisition
  const Sidecar* sidecar = nullptr;
  const OmeSeries* series = nullptr;  ///< null where there is no OME-XML
  int frames = 0;
  int reporter = 0;  ///< imaging channel whose stamps count
  bool cut = false;  ///< stamps beyond the last frame are left out
};

/// Minutes since the first frame, strictly rising, one a frame; empty where nothing gives them.
/// Throws Problem for stamps that do not rise or are not as many as the frames.
std::vector<double> film_times(const TimeSources& sources, std::vector<std::string>& notes);

/// Exposure of the reporter's frames in minutes, 0 when not given.
double film_exposure(const OmeSeries& series, int reporter);

}  // namespace wavefount
