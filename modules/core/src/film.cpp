#include "wavefount/core/film.h"

#include "wavefount/core/robust.h"

namespace wavefount {

double FilmDescription::frame_interval_min() const {
  std::vector<double> steps;
  for (std::size_t i = 1; i < times_min.size(); ++i)
    steps.push_back(times_min[i] - times_min[i - 1]);
  return median(steps);
}

FrameReader::~FrameReader() = default;
FrameSource::~FrameSource() = default;

}  // namespace wavefount
