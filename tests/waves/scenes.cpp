#include "scenes.h"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "wavefount/waves/counter_random.h"

namespace wavefount::testing {
namespace {

/// Numbers one after another from the counter.
class Dice {
 public:
  explicit Dice(std::uint64_t seed) : random_(seed) {}
  double between(double low, double high) {
    return low + (high - low) * random_.uniform(1, next_++);
  }
  double normal() { return random_.normal(2, next_++); }

 private:
  CounterRandom random_;
  std::uint64_t next_ = 0;
};

double distance(Point a, Point b) {
  return std::hypot(a.x - b.x, a.y - b.y);
}

std::vector<Point> nuclei_places(const SceneOptions& options, Dice& dice) {
  std::vector<Point> places;
  const double margin = 0.35 * options.spacing_um;
  if (options.width_um < 1.6 * options.spacing_um) {
    for (double x = margin; x < options.length_um - 0.2 * margin;
         x += options.spacing_um * dice.between(0.72, 1.28))
      places.push_back({x, dice.between(0.3, 0.7) * options.width_um});
    return places;
  }
  const int wanted = static_cast<int>(options.length_um * options.width_um /
                                      (options.spacing_um * options.spacing_um));
  for (int i = 0; i < 60 * wanted && static_cast<int>(places.size()) < wanted; ++i) {
    const Point place{dice.between(0.2 * margin, options.length_um - 0.2 * margin),
                      dice.between(0.1, 0.9) * options.width_um};
    const bool free = std::none_of(places.begin(), places.end(), [&](Point other) {
      return distance(place, other) < 0.72 * options.spacing_um;
    });
    if (free) places.push_back(place);
  }
  return places;
}

struct StartingPoint {
  Point place;
  double delay_min = 0;
};

std::vector<StartingPoint> first_sources(const SceneOptions& options, Dice& dice) {
  const double length = options.length_um;
  const double middle = options.width_um / 2;
  const auto across = [&] {
    return options.at_wall ? 0.03 * options.width_um : dice.between(0.25, 0.75) * options.width_um;
  };
  switch (options.kind) {
    case Kind::single:
      if (options.at_end) return {{{0.02 * length, middle}, 0}};
      return {{{dice.between(0.2, 0.8) * length, across()}, 0}};
    case Kind::two: {
      const double step = 0.25 * length / options.speed_um_per_min;
      return {{{dice.between(0.12, 0.28) * length, across()}, 0},
              {{dice.between(0.72, 0.88) * length, across()}, dice.between(0, 0.6) * step}};
    }
    case Kind::three:
      return {{{dice.between(0.08, 0.16) * length, middle}, 0},
              {{dice.between(0.46, 0.54) * length, middle}, 1},
              {{dice.between(0.84, 0.92) * length, middle}, 2}};
    case Kind::entering:
      return {{{-dice.between(0.1, 0.5) * length, middle}, 0}};
    default:
      return {};
  }
}

/// Slowness along the tube, its mean kept.
double local_slowness(double x, const SceneOptions& options) {
  return (1 +
          options.speed_variation * std::sin(2 * std::numbers::pi * x / options.length_um + 0.7)) /
         options.speed_um_per_min;
}

double travel_min(Point from, Point to, const SceneOptions& options) {
  constexpr int steps = 40;
  double sum = 0;
  for (int i = 0; i < steps; ++i)
    sum += local_slowness(from.x + (i + 0.5) / steps * (to.x - from.x), options);
  return distance(from, to) * sum / steps;
}

struct Arrival {
  double time = 0;
  int source = -1;
};

Arrival arrival_at(Point place, const std::vector<StartingPoint>& sources,
                   const SceneOptions& options) {
  Arrival first{1e300, -1};
  for (int i = 0; i < static_cast<int>(sources.size()); ++i) {
    const double time = sources[i].delay_min + travel_min(sources[i].place, place, options);
    if (time < first.time) first = {time, i};
  }
  return first;
}

void add_entry(Scene& scene, int nucleus, Point place, double time, double se, double formed) {
  Interphase interphase;
  interphase.nucleus = nucleus;
  interphase.start = formed < 0 ? Start::already_present : Start::seen;
  if (formed >= 0) interphase.formed_min = formed;
  interphase.entry = Entry{time, se, time + 1, "aperture"};
  interphase.place_um = place;
  scene.interphases.interphases.push_back(interphase);
}

struct Event {
  int nucleus = 0, wave = -1;
  Point place;
  double time = 0;
};

void make_wave(const SceneOptions& options, const std::vector<Point>& places,
               const std::vector<StartingPoint>& sources, double start, Scene& scene,
               std::vector<Event>& events, Dice& dice) {
  TrueWave truth;
  std::vector<int> basin(sources.size(), 0);
  double left = 1e300, right = -1e300;
  for (int i = 0; i < static_cast<int>(places.size()); ++i) {
    Arrival arrival{0, -1};
    if (!sources.empty()) arrival = arrival_at(places[i], sources, options);
    if (options.kind == Kind::incoherent) arrival.time = dice.between(0, 0.7) * options.period_min;
    if (arrival.source >= 0) ++basin[arrival.source];
    if (dice.between(0, 1) < options.missing_share) continue;
    left = std::min(left, places[i].x);
    right = std::max(right, places[i].x);
    const Point place{places[i].x + 8 * dice.normal(), places[i].y + 4 * dice.normal()};
    const double time = start + arrival.time + options.jitter_min * dice.normal() +
                        options.timing_error_min * dice.normal();
    events.push_back({i + 1, static_cast<int>(scene.waves.size()), place, time});
    if (dice.between(0, 1) < options.extra_share)
      events.push_back({i + 1, -1, place, time + dice.between(0.2, 0.8) * options.period_min});
  }
  for (std::size_t i = 0; i < sources.size(); ++i)
    if (basin[i] >= 2 && options.kind != Kind::entering)
      truth.sources_um.push_back(sources[i].place);
  truth.slowness_min_per_um = sources.empty() || right <= left
                                  ? 0
                                  : travel_min({left, 0}, {right, 0}, options) / (right - left);
  scene.waves.push_back(truth);
}

void add_nuclei(const std::vector<Point>& places, Scene& scene) {
  const double end = scene.times_min.back();
  for (int i = 0; i < static_cast<int>(places.size()); ++i) {
    Nucleus nucleus;
    nucleus.id = i + 1;
    for (const double time : {0.0, end / 2, end}) {
      TracePoint point;
      point.time_min = time;
      point.found = true;
      point.x_um = places[i].x;
      point.y_um = places[i].y;
      nucleus.points.push_back(point);
    }
    scene.nuclei.nuclei.push_back(nucleus);
  }
  scene.nuclei.mitosis_min = 8;
}

void add_interphases(std::vector<Event> events, const SceneOptions& options, Scene& scene) {
  std::stable_sort(events.begin(), events.end(), [](const Event& left, const Event& right) {
    return left.nucleus != right.nucleus ? left.nucleus < right.nucleus : left.time < right.time;
  });
  const double mitosis = scene.nuclei.mitosis_min;
  const Event* before = nullptr;
  for (const auto& event : events) {
    const bool first = before == nullptr || before->nucleus != event.nucleus;
    if (event.wave >= 0)
      scene.waves[event.wave].interphases.push_back(
          static_cast<int>(scene.interphases.interphases.size()));
    add_entry(scene, event.nucleus, event.place, event.time, options.timing_error_min,
              first ? -1 : before->time + mitosis);
    before = &event;
    const bool last = &event == &events.back() || (&event + 1)->nucleus != event.nucleus;
    if (!last) continue;
    Interphase unfinished;
    unfinished.nucleus = event.nucleus;
    unfinished.outcome = Outcome::unfinished;
    unfinished.formed_min = event.time + mitosis;
    unfinished.place_um = event.place;
    scene.interphases.interphases.push_back(unfinished);
  }
}

}  // namespace

Tube straight_tube(double length_um, double width_um) {
  Tube tube;
  tube.measured = true;
  tube.outline_um = {{0, 0}, {length_um, 0}, {length_um, width_um}, {0, width_um}};
  tube.axis_um = {{0, width_um / 2}, {length_um, width_um / 2}};
  tube.width_um = width_um;
  tube.length_um = length_um;
  return tube;
}

Scene make_scene(const SceneOptions& options) {
  Dice dice(options.seed);
  Scene scene;
  scene.tube = straight_tube(options.length_um, options.width_um);
  if (options.kind == Kind::entering) scene.tube.left_end = Boundary::open;
  scene.spacing_um = options.spacing_um;
  const auto places = nuclei_places(options, dice);
  auto sources = first_sources(options, dice);
  std::vector<Event> events;
  double start = 25, period = options.period_min;
  for (int cycle = 0; cycle < options.cycles; ++cycle) {
    make_wave(options, places, sources, start, scene, events, dice);
    start += period;
    period *= 1 + options.period_growth;
    for (auto& source : sources)
      source.place.x = std::clamp(source.place.x + options.moving_um * dice.normal(),
                                  options.kind == Kind::entering ? -1e9 : 0.0, options.length_um);
  }
  double last = 0;
  for (const auto& event : events) last = std::max(last, event.time);
  for (double time = 0; time < last + 60; time += 0.5) scene.times_min.push_back(time);
  add_nuclei(places, scene);
  add_interphases(std::move(events), options, scene);
  return scene;
}

}  // namespace wavefount::testing
