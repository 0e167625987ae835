#include "wavefount/timing/entries.h"

#include <algorithm>
#include <cmath>
#include <map>

#include "wavefount/core/robust.h"
#include "wavefount/timing/measures.h"
#include "wavefount/timing/onset.h"
#include "wavefount/timing/split.h"
#include "wavefount/timing/window.h"

namespace wavefount {

namespace {

constexpr const char* entry_signal = "fixed aperture";
// A release takes most of the light; less is a neighbour's doing or a change of focus.
constexpr double least_drop_share = 0.35;
constexpr double least_drop_sigma = 4;
// Slower than this many times the film's typical fall (and its sampling) is fading.
constexpr double slowest_of_typical = 4;
constexpr std::size_t fewest_for_typical = 5;
// Exposures shorter than this share of the frame interval are taken as instants.
constexpr double short_exposure = 0.02;
// Default windows: long enough for the levels, short enough that a parabola follows the filling.
constexpr double usual_before_min = 5, usual_after_min = 4;
// Where a trace does not say how large its aperture is.
constexpr double usual_radius_um = 10;

// One fall on its way from the courses to its time.
struct Pending {
  std::size_t interphase = 0;  // position in the result
  double duration_min = 0;
  double interval_min = 0;
  FallWindow window;
};

WindowSettings window_settings(const FilmDescription& film, const EntrySettings& settings) {
  WindowSettings window;
  window.before_min =
      settings.window_before_min > 0 ? settings.window_before_min : usual_before_min;
  window.after_min = settings.window_after_min > 0 ? settings.window_after_min : usual_after_min;
  if (film.exposure_min > short_exposure * film.frame_interval_min())
    window.exposure_min = film.exposure_min;
  if (settings.stamp == Stamp::middle) window.stamp_shift_min = -0.5 * film.exposure_min;
  if (settings.stamp == Stamp::end) window.stamp_shift_min = -film.exposure_min;
  return window;
}

bool at_border(const TracePoint& p, const FilmDescription& film) {
  if (film.width <= 0 || film.height <= 0 || film.pixel_um <= 0) return false;
  const double radius = p.radius_um / film.pixel_um;
  return p.x_px < radius || p.y_px < radius || p.x_px > film.width - 1 - radius ||
         p.y_px > film.height - 1 - radius;
}

const TracePoint* point_in(const Nucleus& nucleus, int frame) {
  for (const auto& point : nucleus.points)
    if (point.frame == frame && point.found) return &point;
  return nullptr;
}

// The nucleus broke up or merged about when its signal fell.
bool changed_kin(const Nucleus& nucleus, const Nuclei& nuclei, double time_min, double margin_min) {
  for (const auto& child : nuclei.nuclei) {
    if (child.kinship != Kinship::fragment && child.kinship != Kinship::fusion) continue;
    if (std::find(child.parents.begin(), child.parents.end(), nucleus.id) == child.parents.end())
      continue;
    const auto first = std::find_if(child.points.begin(), child.points.end(),
                                    [](const TracePoint& p) { return p.found; });
    if (first != child.points.end() && std::abs(first->time_min - time_min) <= margin_min)
      return true;
  }
  return false;
}

void lose(Interphase& interphase, const std::string& why) {
  interphase.outcome = Outcome::lost;
  interphase.entry.reset();
  interphase.notes.push_back(why);
}

// Why a fall is none of a mitosis, before it is timed; empty if it may be one.
std::string other_reason(const Course& course, const OpenInterphase& open, const Nucleus& nucleus,
                         const Nuclei& nuclei, const FilmDescription& film,
                         const EntrySettings& settings) {
  const auto& fall = *open.fall;
  if (fall.duration_min(course) > settings.longest_fall_min + 2 * course.interval_min)
    return "faded slowly";
  const auto* last = point_in(nucleus, open.interphase.last_frame);
  if (last && at_border(*last, film)) return "lost at the border of the view";
  if (changed_kin(nucleus, nuclei, course.time_min[fall.half], 4 * course.interval_min))
    return "fragmented or fused";
  return {};
}

void add_nucleus(const Nucleus& nucleus, const ApertureTrace* trace, const Nuclei& nuclei,
                 const FilmDescription& film, const CameraModel* camera,
                 const EntrySettings& settings, Interphases& result,
                 std::vector<Pending>& pending) {
  const auto& overrides = film.overrides;
  const auto course = make_course(nucleus, trace, overrides.first_healthy_min.value_or(-INFINITY),
                                  overrides.last_healthy_min.value_or(INFINITY));
  if (course.size() == 0) return;
  int last_frame = film.frames - 1;
  while (overrides.last_healthy_min && last_frame > 0 &&
         film.times_min[last_frame] > *overrides.last_healthy_min)
    --last_frame;
  for (auto& open : split_course(course, last_frame)) {
    auto& own = open.interphase;
    own.nucleus = nucleus.id;
    measure_interphase(own, nucleus, camera);
    if (open.fall) {
      const auto why = other_reason(course, open, nucleus, nuclei, film, settings);
      if (!why.empty()) {
        lose(own, why);
      } else {
        const double radius = trace && trace->radius_um > 0 ? trace->radius_um : usual_radius_um;
        pending.push_back(
            {result.interphases.size(), open.fall->duration_min(course), course.interval_min,
             make_window(course, *open.fall, open.start, radius, window_settings(film, settings))});
      }
    }
    result.interphases.push_back(std::move(own));
  }
}

// Falls much slower than the film's own are fading.
void lose_slow(std::vector<Pending>& pending, Interphases& result) {
  if (pending.size() < fewest_for_typical) return;
  std::vector<double> durations;
  for (const auto& one : pending) durations.push_back(one.duration_min);
  const double typical = median(std::move(durations));
  std::erase_if(pending, [&](const Pending& one) {
    const bool slow = one.duration_min > slowest_of_typical * typical + 2 * one.interval_min;
    if (slow) lose(result.interphases[one.interphase], "faded more slowly than the others fall");
    return slow;
  });
}

Surroundings surroundings_of(const FilmDescription& film, const ApertureTraces& traces,
                             const Tube* tube) {
  const bool walls = tube && tube->measured && !tube->wide;
  Surroundings where{film.optics, walls ? tube->width_um : 0.0};
  std::vector<double> from;
  std::vector<double> to;
  for (const auto& trace : traces.traces) {
    if (!(trace.ring_to_um > 0)) continue;
    from.push_back(trace.ring_from_um / trace.radius_um);
    to.push_back(trace.ring_to_um / trace.radius_um);
  }
  // Rings scale with their apertures, but for the smallest ones.
  where.ring_from = median(std::move(from));
  where.ring_to = median(std::move(to));
  return where;
}

}  // namespace

Interphases time_entries(const FilmDescription& film, const Nuclei& nuclei,
                         const ApertureTraces& traces, const Tube* tube, const CameraModel* camera,
                         const EntrySettings& settings) {
  Interphases result;
  std::vector<Pending> pending;
  for (std::size_t i = 0; i < nuclei.nuclei.size(); ++i) {
    const auto* trace = i < traces.traces.size() ? &traces.traces[i] : nullptr;
    add_nucleus(nuclei.nuclei[i], trace, nuclei, film, camera, settings, result, pending);
  }
  lose_slow(pending, result);
  std::vector<FallWindow> windows;
  for (const auto& one : pending) windows.push_back(one.window);
  const auto onsets =
      time_falls(windows, surroundings_of(film, traces, tube), settings.shape_falls);
  for (std::size_t i = 0; i < onsets.size(); ++i) {
    auto& own = result.interphases[pending[i].interphase];
    const auto& onset = onsets[i];
    const bool clear = onset.drop_sigma >= least_drop_sigma &&
                       onset.level - onset.base >= least_drop_share * std::abs(onset.level);
    if (clear)
      own.entry = Entry{onset.time_min, onset.se_min, onset.half_loss_min, entry_signal};
    else
      lose(own, "lost without a clear release");
  }
  return result;
}

}  // namespace wavefount
