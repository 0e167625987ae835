#include "point_film.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <numbers>
#include <random>

namespace wavefount::testing {
namespace {

constexpr double pixel_um = 1.3;
constexpr double full_radius_um = 11;
constexpr double full_brightness = 400;
constexpr int false_alarm = -1, debris_mark = -2, cloud_mark = -3;

/// One visible stretch of one nucleus.
struct Stretch {
  int nucleus = 0, index = 0;
  double from_min = 0, to_min = 0;
  Point place;  ///< at its start, without flow
  bool whole_before = false;
  double plateau = 1;
};

class Maker {
 public:
  explicit Maker(const PointFilmPlan& plan) : plan_(plan), random_(plan.seed) {}

  PointFilm make() {
    set_up_film();
    set_up_flow();
    place_nuclei();
    for (int i = 0; i < static_cast<int>(homes_.size()); ++i) live(i, homes_[i], -1, -1e9);
    for (int i = 0; i < plan_.newborn; ++i) {
      const Point place{uniform(0, plan_.length_um), uniform(30, plan_.width_um - 30)};
      if (clear_of_others(place)) live(next_nucleus_++, place, -1, uniform(0.2, 0.8) * end_min_);
    }
    for (const auto& stretch : stretches_) show(stretch);
    add_debris();
    add_false_alarms();
    finish();
    return std::move(made_);
  }

 private:
  double uniform(double from, double to) {
    return from + (to - from) * static_cast<double>(random_()) / 4294967296.0;
  }
  double normal() {
    const double u = uniform(1e-9, 1), v = uniform(0, 1);
    return std::sqrt(-2 * std::log(u)) * std::cos(2 * std::numbers::pi * v);
  }
  bool chance(double share) { return uniform(0, 1) < share; }

  void set_up_film() {
    auto& film = made_.film;
    film.pixel_um = pixel_um;
    film.frames = plan_.frames;
    film.width = static_cast<int>(plan_.length_um / pixel_um) + 200;
    film.height = static_cast<int>(plan_.width_um / pixel_um) + 100;
    for (int i = 0; i < plan_.frames; ++i) {
      double time = i * plan_.interval_min;
      if (plan_.irregular && i > 0) time += uniform(-0.33, 0.33) * plan_.interval_min;
      film.times_min.push_back(time);
      FrameObservation frame;
      frame.frame = i;
      frame.time_min = time;
      frame.usable = !chance(plan_.dropped_share);
      frame.sharpness = 1;
      made_.observations.frames.push_back(frame);
    }
    made_.truth.resize(static_cast<std::size_t>(plan_.frames));
    end_min_ = film.times_min.back();
    auto& tube = made_.tube;
    tube.measured = true;
    tube.outline_um = {
        {0, 0}, {plan_.length_um, 0}, {plan_.length_um, plan_.width_um}, {0, plan_.width_um}};
    tube.axis_um = {{0, plan_.width_um / 2}, {plan_.length_um, plan_.width_um / 2}};
    tube.width_um = plan_.width_um;
    tube.length_um = plan_.length_um;
    set_up_drift();
  }

  void set_up_drift() {
    std::vector<int> jumps, hidden;
    for (int i = 0; i < plan_.jumps; ++i)
      jumps.push_back(static_cast<int>(uniform(0.1, 0.9) * plan_.frames));
    for (int i = 0; i < plan_.hidden_jumps; ++i)
      hidden.push_back(static_cast<int>(uniform(0.1, 0.9) * plan_.frames));
    Point true_px, told_px;
    for (int i = 0; i < plan_.frames; ++i) {
      const Point step{0.3 * normal(), 0.3 * normal()};
      true_px = {true_px.x + step.x, true_px.y + step.y};
      told_px = {told_px.x + step.x, told_px.y + step.y};
      if (std::count(jumps.begin(), jumps.end(), i) > 0) {
        const Point jump{uniform(-60, 60), uniform(-30, 30)};
        const double rest = plan_.jump_rest_um / pixel_um, angle = uniform(0, 6.28);
        true_px = {true_px.x + jump.x, true_px.y + jump.y};
        told_px = {told_px.x + jump.x + rest * std::cos(angle),
                   told_px.y + jump.y + rest * std::sin(angle)};
        made_.drift.jumps.push_back(i);
      }
      if (std::count(hidden.begin(), hidden.end(), i) > 0)
        true_px = {true_px.x + uniform(30, 60), true_px.y + uniform(-30, 30)};
      shift_px_.push_back(true_px);
      made_.drift.x_px.push_back(told_px.x + 0.1 * normal());
      made_.drift.y_px.push_back(told_px.y + 0.1 * normal());
    }
  }

  void set_up_flow() {
    for (double& phase : phases_) phase = uniform(0, 2 * std::numbers::pi);
  }

  /// What flow has moved a thing at `place` by since the film's start: slow in time, smooth in
  /// space.
  Point flowed(Point place, double time_min) const {
    const double turn_min = 80;
    const double reach = plan_.flow_um_per_min * turn_min / (2 * std::numbers::pi);
    const double wave = 2 * std::numbers::pi * time_min / turn_min;
    const double along = 2 * std::numbers::pi * place.x / 900;
    return {reach * (std::sin(wave + phases_[0] + std::sin(along + phases_[1])) -
                     std::sin(phases_[0] + std::sin(along + phases_[1]))),
            0.3 * reach * (std::sin(wave + along + phases_[2]) - std::sin(along + phases_[2]))};
  }

  void place_nuclei() {
    const int tries = 20000;
    for (int i = 0; i < tries; ++i) {
      const Point place{uniform(20, plan_.length_um - 20), uniform(30, plan_.width_um - 30)};
      if (clear_of_others(place)) homes_.push_back(place);
    }
    next_nucleus_ = static_cast<int>(homes_.size());
  }

  bool clear_of_others(Point place) const {
    return std::none_of(homes_.begin(), homes_.end(), [&](Point other) {
      return std::hypot(other.x - place.x, other.y - place.y) < 0.75 * plan_.spacing_um;
    });
  }

  double front_min(double x_um) const {
    return plan_.slowness_min_per_um * std::abs(x_um - 0.35 * plan_.length_um);
  }

  /// All visible stretches of a nucleus and, where nuclei divide, of its daughters.
  void live(int nucleus, Point home, int mother, double born_min) {
    if (static_cast<int>(made_.mother.size()) <= nucleus)
      made_.mother.resize(static_cast<std::size_t>(nucleus) + 1, -1);
    made_.mother[nucleus] = mother;
    Point place = home;
    double interphase = plan_.interphase_min;
    const double first = front_min(home.x) + uniform(-0.02, 0.02);
    double entry = first + 0.35 * interphase - plan_.interphase_min;
    double formed = -1e9;
    int index = 0;
    const double plateau = uniform(0.6, 1.4);
    while (formed < end_min_) {
      const double leaves = entry + plan_.jitter_min * normal();
      if (leaves > 0 && leaves > born_min + 3)
        stretches_.push_back({nucleus, index++, std::max(formed, born_min), leaves, place,
                              formed > -1e8 || born_min > -1e8, plateau});
      if (leaves > born_min && leaves > 0 && leaves < end_min_ && chance(plan_.death_share)) return;
      const double mitosis = plan_.mitosis_min * std::exp(0.15 * normal());
      if (leaves > 0 && leaves + mitosis < end_min_) made_.mitoses_min.push_back(mitosis);
      formed = leaves + mitosis;
      if (leaves > 0 && leaves < end_min_ && chance(plan_.division_share))
        divide(nucleus, place, formed);
      place = moved(home, place);
      interphase *= 1.05;
      entry += interphase + plan_.mitosis_min;
    }
  }

  void divide(int mother, Point place, double formed) {
    const double angle = uniform(0, 2 * std::numbers::pi);
    const double apart = 1.2 * plan_.displacement_um;
    const int daughter = next_nucleus_++;
    made_.mother.resize(static_cast<std::size_t>(daughter) + 1, -1);
    made_.mother[daughter] = mother;
    const double leaves = formed + plan_.interphase_min;
    stretches_.push_back({daughter,
                          0,
                          formed + 0.3,
                          leaves,
                          {place.x + apart * std::cos(angle), place.y + apart * std::sin(angle)},
                          true,
                          uniform(0.6, 1.4)});
  }

  /// Re-forms displaced within its own territory, drawn back a little.
  Point moved(Point home, Point place) {
    const double far = chance(plan_.far_share) ? 3 : 1;
    const double sd = far * plan_.displacement_um;
    const double most = 0.6 * plan_.spacing_um;
    while (true) {
      const Point to{place.x + sd * normal() + 0.4 * (home.x - place.x),
                     place.y + sd * normal() + 0.4 * (home.y - place.y)};
      const bool inside = to.y > 10 && to.y < plan_.width_um - 10;
      if (inside && std::hypot(to.x - place.x, to.y - place.y) < most) return to;
    }
  }

  void show(const Stretch& stretch) {
    Point wander;
    double last = std::max(0.0, stretch.from_min);
    const double sigma_full = 60;
    for (int i = 0; i < plan_.frames; ++i) {
      const double time = made_.film.times_min[i];
      if (time < stretch.from_min || time < 0) continue;
      const double wandered = plan_.wander_um * std::sqrt(std::max(0.0, time - last));
      wander = {wander.x + wandered * normal(), wander.y + wandered * normal()};
      last = time;
      const double age = stretch.whole_before ? time - stretch.from_min : 30;
      const Point at{stretch.place.x + wander.x, stretch.place.y + wander.y};
      if (time > stretch.to_min) {
        show_cloud(stretch, at, time, i);
        continue;
      }
      const double filled = 1 - std::exp(-(age + 1) / 8);
      if (chance(plan_.missed_share + (filled < 0.2 ? 0.3 : 0))) continue;
      Sighting seen;
      seen.radius_px = full_radius_um / pixel_um * (0.45 + 0.55 * std::min(1.0, age / 15));
      seen.brightness = full_brightness * stretch.plateau * filled * (1 + 0.03 * normal());
      seen.detection_sigma = sigma_full * filled * stretch.plateau;
      add(i, at, time, seen, {stretch.nucleus, stretch.index});
    }
  }

  /// The content spreading after the release, while it is still bright enough.
  void show_cloud(const Stretch& stretch, Point at, double time, int frame) {
    const double late = time - stretch.to_min;
    if (late > 2.5) return;
    const double draw = std::fmod(std::abs(stretch.to_min * 977.0 + stretch.nucleus * 61.0), 1.0);
    if (draw > plan_.cloud_share || !chance(std::exp(-late))) return;
    Sighting seen;
    seen.radius_px = full_radius_um / pixel_um * (1 + 0.5 * late);
    seen.brightness = full_brightness * stretch.plateau * 0.5 / (1 + 2 * late);
    seen.detection_sigma = 20 / (1 + 2 * late);
    add(frame, {at.x + 3 * normal(), at.y + 3 * normal()}, time, seen, {cloud_mark, -1});
  }

  void add(int frame, Point place, double time, Sighting seen, TrueSighting who) {
    if (!made_.observations.frames[frame].usable) return;
    const Point flow = flowed(place, time);
    const double x = place.x + flow.x + plan_.centroid_um * normal();
    const double y = place.y + flow.y + plan_.centroid_um * normal();
    seen.x_px = x / pixel_um + shift_px_[frame].x;
    seen.y_px = y / pixel_um + shift_px_[frame].y;
    seen.area_px = std::numbers::pi * seen.radius_px * seen.radius_px * (1 + 0.04 * normal());
    seen.integrated = seen.area_px * seen.brightness;
    made_.observations.frames[frame].sightings.push_back(seen);
    made_.truth[frame].push_back(who);
  }

  void add_debris() {
    for (int k = 0; k < plan_.debris; ++k) {
      const Point place{uniform(20, plan_.length_um - 20), uniform(5, plan_.width_um - 5)};
      const double level = uniform(0.3, 2) * full_brightness;
      const double radius = uniform(3, 9) / pixel_um;
      for (int i = 0; i < plan_.frames; ++i) {
        if (chance(plan_.missed_share)) continue;
        Sighting seen;
        seen.radius_px = radius;
        seen.brightness = level * (1 + 0.05 * normal()) * std::exp(-0.5 * i / plan_.frames);
        seen.detection_sigma = 40;
        add(i, place, made_.film.times_min[i], seen, {debris_mark, k});
      }
    }
  }

  void add_false_alarms() {
    const double a_frame =
        plan_.false_share * static_cast<double>(std::max<std::size_t>(homes_.size(), 1));
    for (int i = 0; i < plan_.frames; ++i) {
      for (double left = a_frame; left > 0; --left) {
        if (!chance(std::min(1.0, left))) continue;
        Sighting seen;
        seen.radius_px = uniform(3, 10) / pixel_um;
        seen.brightness = uniform(0.05, 0.25) * full_brightness;
        seen.detection_sigma = uniform(5, 9);
        add(i, {uniform(0, plan_.length_um), uniform(0, plan_.width_um)}, made_.film.times_min[i],
            seen, {false_alarm, -1});
      }
    }
  }

  /// Sightings come in no order that gives identity away.
  void finish() {
    for (int i = 0; i < plan_.frames; ++i) {
      auto& sightings = made_.observations.frames[i].sightings;
      std::vector<std::size_t> order(sightings.size());
      for (std::size_t j = 0; j < order.size(); ++j) order[j] = j;
      for (std::size_t j = order.size(); j > 1; --j)
        std::swap(order[j - 1], order[static_cast<std::size_t>(uniform(0, double(j)))]);
      std::vector<Sighting> shuffled;
      std::vector<TrueSighting> truth;
      for (const auto j : order) {
        shuffled.push_back(sightings[j]);
        truth.push_back(made_.truth[i][j]);
      }
      sightings = std::move(shuffled);
      made_.truth[i] = std::move(truth);
    }
  }

  PointFilmPlan plan_;
  std::mt19937 random_;
  PointFilm made_;
  double end_min_ = 0;
  double phases_[3] = {};
  std::vector<Point> shift_px_;
  std::vector<Point> homes_;
  int next_nucleus_ = 0;
  std::vector<Stretch> stretches_;
};

using Key = std::pair<int, int>;  ///< true nucleus, interphase

int majority(const std::map<int, int>& counts) {
  int best = 0, most = 0;
  for (const auto& [value, count] : counts)
    if (count > most) {
      most = count;
      best = value;
    }
  return best;
}

}  // namespace

PointFilm make_point_film(const PointFilmPlan& plan) {
  return Maker(plan).make();
}

LinkScore& LinkScore::operator+=(const LinkScore& other) {
  links += other.links;
  links_right += other.links_right;
  mitoses += other.mitoses;
  mitoses_right += other.mitoses_right;
  mitoses_swapped += other.mitoses_swapped;
  nuclei += other.nuclei;
  nuclei_invented += other.nuclei_invented;
  debris_kept += other.debris_kept;
  sightings += other.sightings;
  sightings_lost += other.sightings_lost;
  false_kept += other.false_kept;
  return *this;
}

LinkScore score_links(const PointFilm& made, const Nuclei& nuclei) {
  LinkScore score;
  std::vector<std::vector<int>> id_of;  // by frame, sighting; 0 in no trace
  for (const auto& frame : made.truth) id_of.emplace_back(frame.size(), 0);
  for (const auto& nucleus : nuclei.nuclei) {
    std::map<int, int> who;
    for (const auto& point : nucleus.points) {
      if (!point.found) continue;
      id_of[point.frame][point.sighting] = nucleus.id;
      ++who[made.truth[point.frame][point.sighting].nucleus];
    }
    ++score.nuclei;
    if (majority(who) == debris_mark) ++score.debris_kept;
    if (majority(who) < 0 && majority(who) != debris_mark) ++score.nuclei_invented;
  }
  std::map<Key, std::vector<int>> ids;  // by rising frame
  for (std::size_t i = 0; i < made.truth.size(); ++i)
    for (std::size_t j = 0; j < made.truth[i].size(); ++j) {
      const auto& who = made.truth[i][j];
      if (who.nucleus < 0) {
        if (id_of[i][j] > 0 && who.nucleus == false_alarm) ++score.false_kept;
        continue;
      }
      ++score.sightings;
      if (id_of[i][j] == 0) ++score.sightings_lost;
      ids[{who.nucleus, who.interphase}].push_back(id_of[i][j]);
    }
  std::map<Key, int> id_of_interphase;
  for (const auto& [key, own] : ids) {
    std::map<int, int> counts;
    for (std::size_t k = 0; k < own.size(); ++k) {
      ++counts[own[k]];
      if (k == 0) continue;
      ++score.links;
      if (own[k] == own[k - 1] && own[k] > 0) ++score.links_right;
    }
    id_of_interphase[key] = majority(counts);
  }
  for (const auto& [key, own] : ids) {
    const Key next{key.first, key.second + 1};
    if (!ids.contains(next) || own.size() < 2 || ids[next].size() < 2) continue;
    ++score.mitoses;
    const int before = id_of_interphase[key], after = id_of_interphase[next];
    if (before == after && before > 0) {
      ++score.mitoses_right;
    } else if (before > 0 && after > 0) {
      ++score.mitoses_swapped;
    }
  }
  return score;
}

}  // namespace wavefount::testing
