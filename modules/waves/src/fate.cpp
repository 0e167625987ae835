#include "wavefount/waves/fate.h"

#include <algorithm>
#include <cmath>

namespace wavefount {
namespace {

/// First moment at which an interphase shows its nucleus.
std::optional<double> formed_at(const Interphase& interphase) {
  if (interphase.start == Start::already_present) return std::nullopt;
  return interphase.formed_min;
}

std::optional<double> first_seen(const Nucleus& nucleus) {
  for (const auto& point : nucleus.points) {
    if (point.found) return point.time_min;
  }
  return std::nullopt;
}

struct Window {
  double from_min = 0, to_min = 0;
  bool holds(const std::optional<double>& time) const {
    return time && *time > from_min && *time <= to_min;
  }
};

bool seen_again(const WaveEntry& entry, const Window& window, const Interphases& interphases,
                const Nuclei& nuclei, double reach_um) {
  for (const auto& one : interphases.interphases) {
    const bool own = one.nucleus == entry.nucleus;
    const bool here =
        std::hypot(one.place_um.x - entry.x_um, one.place_um.y - entry.y_um) < reach_um;
    if ((own || here) && window.holds(formed_at(one))) return true;
  }
  for (const auto& nucleus : nuclei.nuclei) {
    if (nucleus.points.empty()) continue;
    const bool child = std::find(nucleus.parents.begin(), nucleus.parents.end(), entry.nucleus) !=
                       nucleus.parents.end();
    const auto& first = nucleus.points.front();
    const bool here = std::hypot(first.x_um - entry.x_um, first.y_um - entry.y_um) < reach_um;
    if ((child || here) && window.holds(first_seen(nucleus))) return true;
    if (nucleus.id != entry.nucleus) continue;
    // What is still found just after entry is the released content, spreading.
    const double spread_min = entry.time_min + (window.to_min - entry.time_min) / 4;
    const bool found =
        std::any_of(nucleus.points.begin(), nucleus.points.end(), [&](const TracePoint& point) {
          return point.found && point.time_min > spread_min && point.time_min <= window.to_min;
        });
    if (found) return true;
  }
  return false;
}

}  // namespace

Fate fate_of(const Wave& wave, const WaveEntries& entries, const Interphases& interphases,
             const Nuclei& nuclei, const Tube& tube, const FateRules& rules) {
  const double mitosis = nuclei.mitosis_min > 0 ? nuclei.mitosis_min : rules.longest_mitosis_min;
  int again = 0, gone = 0, open = 0;
  for (const int at : wave.entries) {
    const auto& entry = entries.entries[at];
    const Window window{entry.time_min, entry.time_min + 2 * mitosis};
    const bool leaves =
        tube.place({entry.x_um, entry.y_um}).open_distance_um < rules.spacing_um / 2;
    if (seen_again(entry, window, interphases, nuclei, rules.spacing_um / 2))
      ++again;
    else if (!leaves)
      ++(window.to_min <= rules.film_end_min ? gone : open);
  }
  if (again > 0 && again >= gone + open) return Fate::confirmed;
  return gone > again + open ? Fate::terminal : Fate::unconfirmed;
}

}  // namespace wavefount
