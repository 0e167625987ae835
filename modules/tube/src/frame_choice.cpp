#include "wavefount/tube/frame_choice.h"

#include <algorithm>
#include <cstddef>

#include "wavefount/core/text.h"

namespace wavefount::tube {

std::string kept_out(const FilmDescription& film, int frame) {
  const auto& overrides = film.overrides;
  const auto& excluded = overrides.exclude_frames;
  if (std::find(excluded.begin(), excluded.end(), frame) != excluded.end())
    return "The sidecar excludes this frame.";
  const auto at = static_cast<std::size_t>(frame);
  if (at >= film.times_min.size()) return {};
  const double time_min = film.times_min[at];
  if (overrides.first_healthy_min && time_min < *overrides.first_healthy_min)
    return "The frame is before first_healthy_min, " + rounded_text(*overrides.first_healthy_min) +
           " min.";
  if (overrides.last_healthy_min && time_min > *overrides.last_healthy_min)
    return "The frame is after last_healthy_min, " + rounded_text(*overrides.last_healthy_min) +
           " min.";
  return {};
}

std::vector<int> spread_frames(const FilmDescription& film, int count) {
  std::vector<int> allowed;
  for (int frame = 0; frame < film.frames; ++frame)
    if (kept_out(film, frame).empty()) allowed.push_back(frame);
  if (static_cast<int>(allowed.size()) <= count) return allowed;
  std::vector<int> chosen;
  const auto last = static_cast<long long>(allowed.size()) - 1;
  for (long long i = 0; i < count; ++i)
    chosen.push_back(allowed[static_cast<std::size_t>(count > 1 ? i * last / (count - 1) : 0)]);
  return chosen;
}

}  // namespace wavefount::tube
