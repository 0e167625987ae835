#include "film_times.h"

#include <algorithm>
#include <optional>

#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

/// Throws Problem unless the stamps rise; returns them counted from the first.
std::vector<double> from_first(std::vector<double> times, const std::string& origin,
                               const std::string& remedy) {
  for (std::size_t i = 1; i < times.size(); ++i) {
    if (times[i] > times[i - 1]) continue;
    throw Problem(origin + (times[i] < times[i - 1] ? " go backwards" : " stand still") +
                  " at frame " + std::to_string(i) + " (" + rounded_text(times[i]) + " min after " +
                  rounded_text(times[i - 1]) + " min); " + remedy + ".");
  }
  const double first = times.empty() ? 0 : times.front();
  for (double& time : times) time -= first;
  return times;
}

std::vector<double> sidecar_times(const TimeSources& sources) {
  const auto& sidecar = *sources.sidecar;
  const std::string name = sidecar.file.filename().string();
  auto times = sidecar.times_min;
  const auto frames = static_cast<std::size_t>(sources.frames);
  if (times.size() < frames || (times.size() > frames && !sources.cut)) {
    throw Problem("The sidecar " + name + " gives " + std::to_string(times.size()) + " times in " +
                  sidecar.times_key + ", but the film has " + std::to_string(frames) +
                  " frames; give one time a frame.");
  }
  times.resize(frames);
  return from_first(std::move(times), "The times of " + sidecar.times_key + " in " + name,
                    "correct them");
}

std::vector<double> even_times(int frames, double interval) {
  std::vector<double> times(static_cast<std::size_t>(frames));
  for (std::size_t i = 0; i < times.size(); ++i) times[i] = interval * static_cast<double>(i);
  return times;
}

/// DeltaT of the reporter's lowest plane in each frame.
std::vector<std::optional<double>> plane_stamps(const TimeSources& sources) {
  std::vector<std::optional<double>> stamps(static_cast<std::size_t>(sources.frames));
  std::vector<int> taken_z(stamps.size(), 0);
  for (const auto& plane : sources.series->planes) {
    if (plane.t >= sources.frames || plane.c != sources.reporter || !plane.delta_min) continue;
    const auto frame = static_cast<std::size_t>(plane.t);
    if (stamps[frame] && plane.z >= taken_z[frame]) continue;
    stamps[frame] = plane.delta_min;
    taken_z[frame] = plane.z;
  }
  return stamps;
}

/// Stamps of all frames; empty where some are missing or all are the same.
std::vector<double> ome_stamps(const TimeSources& sources, std::vector<std::string>& notes) {
  const auto stamps = plane_stamps(sources);
  std::vector<double> times;
  for (const auto& stamp : stamps) {
    if (stamp) times.push_back(*stamp);
  }
  if (times.empty()) return {};
  if (times.size() < stamps.size()) {
    notes.push_back("The OME-XML stamps only " + std::to_string(times.size()) + " of " +
                    std::to_string(stamps.size()) + " frames; its stamps were left out.");
    return {};
  }
  const bool same =
      std::all_of(times.begin(), times.end(), [&](double time) { return time == times.front(); });
  return same ? std::vector<double>() : times;
}

}  // namespace

std::vector<double> film_times(const TimeSources& sources, std::vector<std::string>& notes) {
  const auto& sidecar = *sources.sidecar;
  if (!sidecar.times_min.empty()) return sidecar_times(sources);
  if (sidecar.interval_min) return even_times(sources.frames, *sidecar.interval_min);
  if (sources.frames == 1) return {0};
  if (sources.series == nullptr) return {};
  auto stamps = ome_stamps(sources, notes);
  if (!stamps.empty()) {
    return from_first(std::move(stamps), "The time stamps of the film " + sources.film,
                      "write \"frame_interval_min: 1\" (with the true minutes) or times_min into " +
                          sidecar.file.filename().string() + " beside the film");
  }
  if (!sources.series->interval_min) return {};
  return even_times(sources.frames, *sources.series->interval_min);
}

double film_exposure(const OmeSeries& series, int reporter) {
  for (const auto& plane : series.planes) {
    const bool usable = plane.exposure_min && *plane.exposure_min > 0;
    if (plane.c == reporter && usable) return *plane.exposure_min;
  }
  return 0;
}

}  // namespace wavefount
