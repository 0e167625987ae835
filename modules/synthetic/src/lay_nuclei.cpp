#include "lay_nuclei.h"

#include <algorithm>
#include <cmath>

namespace wavefount {
namespace {

struct Home {
  double along = 0, across = 0;
};

/// Random sequential placing: tries until the tube is full. In a full one the mean distance to the
/// nearest neighbour is about 1.2 times the hard core.
std::vector<Home> place_in(const SceneRecipe& recipe, const Tube& tube, RandomSequence& random) {
  constexpr int patience = 600;
  constexpr double beyond_um = 300;
  const double core = recipe.spacing_um / 1.2;
  const double rim = recipe.radius_um + 8;
  const double half = tube.width_um / 2 - rim;
  const double from = tube.left_end == Boundary::closed ? rim : -beyond_um;
  const double to = tube.length_um + (tube.right_end == Boundary::closed ? -rim : beyond_um);
  std::vector<Home> homes;
  for (int failed = 0; failed < patience; ++failed) {
    const Home home{random.uniform(from, to), random.uniform(-half, half)};
    const bool free = std::none_of(homes.begin(), homes.end(), [&](const Home& other) {
      return std::hypot(home.along - other.along, home.across - other.across) < core;
    });
    if (!free) continue;
    homes.push_back(home);
    failed = 0;
  }
  return homes;
}

void add_companions(const SceneRecipe& recipe, const Tube& tube, RandomSequence& random,
                    std::vector<Home>& homes) {
  const double apart = 2.02 * recipe.radius_um;
  const double half = tube.width_um / 2 - recipe.radius_um - 4;
  const auto singles =
      std::min<std::size_t>(homes.size(), static_cast<std::size_t>(recipe.touching));
  for (std::size_t i = 0; i < singles; ++i) {
    const double turn = random.uniform(0, 2 * M_PI);
    const Home home{homes[i].along + apart * std::cos(turn),
                    homes[i].across + apart * std::sin(turn)};
    if (std::abs(home.across) < half && home.along > recipe.radius_um &&
        home.along < tube.length_um - recipe.radius_um)
      homes.push_back(home);
  }
}

bool in_bubble(const Scene& scene, Point place, double clearance_um) {
  return std::any_of(scene.nuisances.bubbles.begin(), scene.nuisances.bubbles.end(),
                     [&](const Spot& bubble) {
                       return std::hypot(place.x - bubble.place_um.x, place.y - bubble.place_um.y) <
                              bubble.radius_um + clearance_um;
                     });
}

SceneNucleus nucleus_at(const Home& home, int tube, RandomSequence& random) {
  SceneNucleus nucleus;
  nucleus.tube = tube;
  nucleus.along_um = home.along;
  nucleus.across_um = home.across;
  nucleus.angle = random.uniform(0, M_PI);
  nucleus.elongation = random.uniform(0.01, 0.09);
  nucleus.lobes = random.uniform(0, 0.04);
  nucleus.texture = random.uniform(0.03, 0.1);
  return nucleus;
}

/// A life drawn around the recipe's means, at a place near the nucleus' home.
SceneLife draw_life(const SceneRecipe& recipe, RandomSequence& random) {
  SceneLife life;
  life.plateau = recipe.brightness * std::exp(recipe.brightness_spread * random.normal());
  life.import_per_min = recipe.import_per_min * std::exp(recipe.import_spread * random.normal());
  life.last_radius_um = recipe.radius_um * std::exp(0.05 * random.normal());
  life.first_radius_um = 0.35 * life.last_radius_um;
  life.growth_per_min = 0.16 * std::exp(0.1 * random.normal());
  life.leak_per_min = recipe.leak_per_min;
  life.leak_min = recipe.leak_per_min > 0 ? 2 : 0;
  life.permeabilise_min = recipe.permeabilise_min * std::exp(0.2 * random.normal());
  life.velocity_um_per_min = {recipe.wander_um_per_min * random.normal(),
                              recipe.wander_um_per_min * random.normal()};
  return life;
}

/// How far a nucleus may step from home without running into a neighbour that does the same.
double room_um(const SceneRecipe& recipe, const Scene& scene, const SceneNucleus& nucleus) {
  double room = 2.2 * recipe.relocate_um;
  for (const auto& other : scene.nuclei) {
    if (other.tube != nucleus.tube || other.number == nucleus.number) continue;
    const double apart =
        std::hypot(other.along_um - nucleus.along_um, other.across_um - nucleus.across_um);
    // A step of this size each way is longer by the square root of two on the diagonal.
    room = std::min(room, (apart - 2 * recipe.radius_um) / 2 / std::sqrt(2.0));
  }
  return std::max(room, 0.0);
}

/// Step between interphases, kept away from the walls.
Home relocated(const SceneRecipe& recipe, const Tube& tube, const SceneNucleus& nucleus,
               double reach, RandomSequence& random) {
  const auto step = [&] { return std::clamp(recipe.relocate_um * random.normal(), -reach, reach); };
  const double rim = recipe.radius_um + 5;
  const double half = tube.width_um / 2 - rim;
  Home home{nucleus.along_um + step(), std::clamp(nucleus.across_um + step(), -half, half)};
  if (tube.left_end == Boundary::closed) home.along = std::max(home.along, rim);
  if (tube.right_end == Boundary::closed) home.along = std::min(home.along, tube.length_um - rim);
  return home;
}

void set_motion(const SceneRecipe& recipe, const Tube& tube, const Home& home, SceneLife& life) {
  const Point ahead = point_at(tube, home.along + 1, home.across);
  const Point here =
      point_at(tube, home.along + recipe.flow_um_per_min * life.formed_min, home.across);
  const Point base = point_at(tube, home.along, home.across);
  life.place_um = here;
  life.velocity_um_per_min.x += recipe.flow_um_per_min * (ahead.x - base.x);
  life.velocity_um_per_min.y += recipe.flow_um_per_min * (ahead.y - base.y);
}

class Scheduler {
 public:
  Scheduler(const SceneRecipe& recipe, RandomSequence& random, Scene& scene)
      : recipe_(recipe), random_(random), scene_(scene) {
    end_min_ = scene.times_min.empty() ? 0 : scene.times_min.back();
    for (const auto& source : scene.sources) longest_ = std::max(longest_, source.period_min);
  }

  void schedule(SceneNucleus& nucleus) {
    if (scene_.sources.empty()) return;
    const auto& tube = scene_.tubes[static_cast<std::size_t>(nucleus.tube)];
    int cycle = first_cycle(nucleus);
    double before = entry(nucleus, cycle - 1);
    const double room = room_um(recipe_, scene_, nucleus);
    for (;; ++cycle) {
      const double formed =
          before +
          std::max(2.0, scene_.waves.mitosis_min + scene_.waves.mitosis_sd_min * random_.normal());
      if (formed > end_min_) break;
      SceneLife life = draw_life(recipe_, random_);
      life.cycle = cycle;
      life.formed_min = formed;
      life.entry_min = std::max(entry(nucleus, cycle), formed + 4);
      set_motion(recipe_, tube, relocated(recipe_, tube, nucleus, room, random_), life);
      nucleus.lives.push_back(life);
      before = life.entry_min;
      if (scene_.waves.arrest && cycle >= scene_.waves.arrest_cycle) break;
    }
  }

 private:
  /// The first cycle whose entry, or what it releases, can show in the film.
  int first_cycle(const SceneNucleus& nucleus) const {
    int cycle = 1;
    while (arrival_min(scene_, nucleus.tube, nucleus.along_um, nucleus.across_um, cycle) >
           -1.5 * longest_)
      --cycle;
    while (arrival_min(scene_, nucleus.tube, nucleus.along_um, nucleus.across_um, cycle) <
           -0.75 * longest_)
      ++cycle;
    return cycle;
  }
  double entry(const SceneNucleus& nucleus, int cycle) {
    return arrival_min(scene_, nucleus.tube, nucleus.along_um, nucleus.across_um, cycle) +
           scene_.waves.jitter_min * random_.normal();
  }

  const SceneRecipe& recipe_;
  RandomSequence& random_;
  Scene& scene_;
  double end_min_ = 0;
  double longest_ = 0;
};

void let_die(const SceneRecipe& recipe, RandomSequence& random, Scene& scene) {
  int left = recipe.dying;
  const double end = scene.times_min.empty() ? 0 : scene.times_min.back();
  for (std::size_t i = 2; i < scene.nuclei.size() && left > 0; i += 5) {
    auto& lives = scene.nuclei[i].lives;
    for (std::size_t k = 0; k < lives.size(); ++k) {
      const double middle = lives[k].formed_min + 0.6 * (lives[k].entry_min - lives[k].formed_min);
      if (middle < 0.3 * end || middle > 0.8 * end) continue;
      lives[k].entry_min = middle;
      lives[k].dies = true;
      lives[k].fade_min = random.uniform(3, 6);
      lives.resize(k + 1);
      --left;
      break;
    }
  }
}

}  // namespace

double arrival_min(const Scene& scene, int tube, double along_um, double across_um, int cycle,
                   int* source) {
  const auto& waves = scene.waves;
  const double slowness =
      std::max(0.0, 1 + waves.speed_change * (cycle - 1)) / waves.speed_um_per_min;
  double earliest = 1e9;
  for (std::size_t i = 0; i < scene.sources.size(); ++i) {
    const auto& from = scene.sources[i];
    if (from.tube != tube) continue;
    const double distance = std::hypot(along_um - from.along_um, across_um - from.across_um);
    const double arrival =
        from.first_min + (cycle - 1) * from.period_min + (waves.together ? 0 : distance * slowness);
    if (arrival >= earliest) continue;
    earliest = arrival;
    if (source) *source = static_cast<int>(i);
  }
  return earliest;
}

void lay_nuclei(const SceneRecipe& recipe, RandomSequence& random, Scene& scene) {
  if (recipe.spacing_um <= 0) return;
  for (std::size_t t = 0; t < scene.tubes.size(); ++t) {
    auto homes = place_in(recipe, scene.tubes[t], random);
    const auto missing = std::min(homes.size(), static_cast<std::size_t>(recipe.missing));
    homes.resize(homes.size() - missing);
    add_companions(recipe, scene.tubes[t], random, homes);
    std::sort(homes.begin(), homes.end(),
              [](const Home& a, const Home& b) { return a.along < b.along; });
    for (const auto& home : homes) {
      if (in_bubble(scene, point_at(scene.tubes[t], home.along, home.across), recipe.radius_um + 8))
        continue;
      scene.nuclei.push_back(nucleus_at(home, static_cast<int>(t), random));
      scene.nuclei.back().number = static_cast<int>(scene.nuclei.size()) - 1;
    }
  }
}

void schedule_lives(const SceneRecipe& recipe, RandomSequence& random, Scene& scene) {
  Scheduler scheduler(recipe, random, scene);
  for (auto& nucleus : scene.nuclei) scheduler.schedule(nucleus);
  let_die(recipe, random, scene);
}

}  // namespace wavefount
