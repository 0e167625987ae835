#include "wavefount/waves/source_model.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>
#include <utility>

#include "wavefount/core/robust.h"
#include "wavefount/waves/counter_random.h"

namespace wavefount {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr std::size_t most_sources = 8;
constexpr std::size_t least_arrivals = 5;
// Prior: each further source a quarter as likely; fronts from 30,000 µm/min (all at once, for any
// film) down to 1; slowness along the tube within some ten per cent; jitter from a
// second to a third of a period.
const double log_another_source = std::log(0.25);
const double least_log_slowness = std::log(1.0 / 30000);
const double most_log_slowness = std::log(1.0);
const double least_log_jitter = std::log(0.02);
const double most_log_jitter = std::log(12.0);
constexpr double usual_variation = 0.12;
constexpr double stray_share = 0.02;

/// Jitter of waves of one tube: log-normal around the common one, with a floor for a wave of
/// another kind. Not yet known: anything.
struct JitterPrior {
  double common_min = 0;
  double log_density(double log_jitter) const {
    if (log_jitter < least_log_jitter || log_jitter > most_log_jitter) return -infinity;
    if (common_min <= 0) return 0;
    constexpr double spread = 0.35;
    constexpr double floor = 0.01;
    const double off = (log_jitter - std::log(common_min)) / spread;
    return std::log(std::exp(-0.5 * off * off) + floor);
  }
};

struct FrontSource {
  Point place;
  double start = 0;
  double depth = 0;              // running slowness integral at its place
  std::vector<double> arrivals;  // by nucleus
};

/// Integral of slowness along the tube: piecewise linear log slowness at knots.
struct SlownessCurve {
  double log_level = 0;
  std::vector<double> offsets;  // at the knots
};

struct State {
  std::vector<FrontSource> sources;
  SlownessCurve curve;
  std::vector<double> depth;                      // at the nuclei
  std::vector<double> knot_slowness, knot_depth;  // at the knots
  double log_jitter = 0, log_variation = 0;
  std::vector<double> field;
  std::vector<int> label;
  double log_likelihood = 0;
};

/// Standard normals and uniforms one after another.
class Dice {
 public:
  Dice(std::uint64_t seed, std::uint64_t stream) : random_(seed), stream_(stream) {}
  double uniform() { return random_.uniform(stream_, next_++); }
  double normal() { return random_.normal(stream_ + (1ULL << 40U), next_++); }
  int whole(int count) { return random_.whole(stream_, next_++, count); }

 private:
  CounterRandom random_;
  std::uint64_t stream_, next_ = 0;
};

double normal_log_density(double off, double sd) {
  return -0.5 * off * off / (sd * sd) - std::log(sd) - 0.5 * std::log(2 * std::numbers::pi);
}

/// What all chains of one wave share.
class Model {
 public:
  Model(const Arrivals& arrivals, const SourceRegion& region, double period_min, JitterPrior prior)
      : arrivals_(arrivals), region_(region), prior_(prior) {
    const auto [first, last] =
        std::minmax_element(arrivals.times_min.begin(), arrivals.times_min.end());
    earliest_ = *first;
    latest_ = *last;
    log_stray_ = std::log(stray_share / std::max(period_min, latest_ - earliest_));
    constexpr double knot_spacings = 4;
    const double length = region.right_um - region.left_um;
    const double wanted = std::ceil(length / (knot_spacings * region.spacing_um)) + 1;
    knots_ = static_cast<int>(std::clamp(wanted, 2.0, 14.0));
    knot_step_ = length / (knots_ - 1);
  }

  std::size_t count() const { return arrivals_.times_min.size(); }
  int knots() const { return knots_; }
  const Arrivals& arrivals() const { return arrivals_; }
  const SourceRegion& region() const { return region_; }
  bool on_line() const { return region_.lower_um <= region_.upper_um; }
  double earliest() const { return earliest_; }

  /// Uniform over the region, and over starts from a wave's length before its first entry.
  double log_source_prior(const FrontSource& source) const {
    const auto& p = source.place;
    if (p.x < region_.left_um || p.x > region_.right_um) return -infinity;
    if (!on_line() && (p.y < region_.upper_um || p.y > region_.lower_um)) return -infinity;
    const double window = 2 * (latest_ - earliest_) + 5;
    if (source.start > latest_ || source.start < latest_ - window) return -infinity;
    const double across = on_line() ? 1 : region_.lower_um - region_.upper_um;
    return -std::log((region_.right_um - region_.left_um) * across * window);
  }

  double log_prior(const State& state) const {
    const double variation = std::exp(state.log_variation);
    if (state.curve.log_level < least_log_slowness || state.curve.log_level > most_log_slowness)
      return -infinity;
    double sum = log_another_source * static_cast<double>(state.sources.size());
    for (const auto& source : state.sources) sum += log_source_prior(source);
    for (const double offset : state.curve.offsets) sum += normal_log_density(offset, variation);
    const double size = variation / usual_variation;
    sum += state.log_variation - 0.5 * size * size;
    return sum + prior_.log_density(state.log_jitter);
  }

  void set_curve(State& state) const {
    state.knot_slowness.resize(knots_);
    for (int i = 0; i < knots_; ++i)
      state.knot_slowness[i] = std::exp(state.curve.log_level + state.curve.offsets[i]);
    state.knot_depth.assign(knots_, 0);
    for (int i = 1; i < knots_; ++i)
      state.knot_depth[i] = state.knot_depth[i - 1] +
                            knot_step_ * (state.knot_slowness[i - 1] + state.knot_slowness[i]) / 2;
    state.depth.resize(count());
    for (std::size_t i = 0; i < count(); ++i)
      state.depth[i] = depth_at(state, arrivals_.places_um[i].x);
    for (auto& source : state.sources) set_arrivals(state, source);
  }

  double depth_at(const State& state, double x) const {
    const double at = std::clamp((x - region_.left_um) / knot_step_, 0.0, knots_ - 1.0);
    const int below = std::min(static_cast<int>(at), knots_ - 2);
    const double share = at - below;
    const double from = state.knot_slowness[below];
    const double to = state.knot_slowness[below + 1];
    return state.knot_depth[below] + knot_step_ * share * (from + share * (to - from) / 2);
  }

  double slowness_at(const State& state, double x) const {
    const double at = std::clamp((x - region_.left_um) / knot_step_, 0.0, knots_ - 1.0);
    const int below = std::min(static_cast<int>(at), knots_ - 2);
    return state.knot_slowness[below] +
           (at - below) * (state.knot_slowness[below + 1] - state.knot_slowness[below]);
  }

  /// Travel time: on a line the integral itself; in a plane the distance times the mean slowness
  /// over the stretch along the tube.
  double travel(const State& state, const FrontSource& source, Point place, double depth) const {
    const double along = std::abs(place.x - source.place.x);
    const double integral = std::abs(depth - source.depth);
    if (on_line()) return integral;
    const double r = std::hypot(place.x - source.place.x, place.y - source.place.y);
    if (along > 1e-3 * region_.spacing_um) return integral * r / along;
    return r * slowness_at(state, source.place.x);
  }

  void set_arrivals(const State& state, FrontSource& source) const {
    source.depth = depth_at(state, source.place.x);
    source.arrivals.resize(count());
    for (std::size_t i = 0; i < count(); ++i)
      source.arrivals[i] =
          source.start + travel(state, source, arrivals_.places_um[i], state.depth[i]);
  }

  /// Field, labels and likelihood from the sources' arrivals; false when a source is overrun before
  /// it starts, or comes first nowhere.
  bool settle(State& state) const {
    state.field.assign(count(), infinity);
    state.label.assign(count(), 0);
    for (int k = 0; k < static_cast<int>(state.sources.size()); ++k) {
      const auto& own = state.sources[k].arrivals;
      for (std::size_t i = 0; i < count(); ++i) {
        if (own[i] >= state.field[i]) continue;
        state.field[i] = own[i];
        state.label[i] = k;
      }
    }
    if (!all_active(state)) return false;
    state.log_likelihood = likelihood(state);
    return true;
  }

  double likelihood(const State& state) const {
    const double jitter2 = std::exp(2 * state.log_jitter);
    double sum = 0;
    for (std::size_t i = 0; i < count(); ++i) {
      const double variance = jitter2 + arrivals_.se_min[i] * arrivals_.se_min[i];
      const double off = arrivals_.times_min[i] - state.field[i];
      const double inside =
          -0.5 * (off * off / variance + std::log(2 * std::numbers::pi * variance));
      constexpr double plainly_inside = 4;  // nats above a stray: the stray adds under 2 %
      sum += inside > log_stray_ + plainly_inside
                 ? inside
                 : log_stray_ + std::log1p(std::exp(inside - log_stray_));
    }
    return sum;
  }

  bool is_stray(const State& state, std::size_t i) const {
    const double variance =
        std::exp(2 * state.log_jitter) + arrivals_.se_min[i] * arrivals_.se_min[i];
    const double off = arrivals_.times_min[i] - state.field[i];
    return log_stray_ > -0.5 * (off * off / variance + std::log(2 * std::numbers::pi * variance));
  }

  /// Median slowness between places near one another.
  double neighbour_slowness() const {
    std::vector<double> slownesses;
    for (std::size_t i = 0; i < count(); ++i) {
      for (std::size_t j = 0; j < i; ++j) {
        const double away = apart(i, j);
        if (away < near_spacings * region_.spacing_um && away > 0)
          slownesses.push_back(std::abs(arrivals_.times_min[i] - arrivals_.times_min[j]) / away);
      }
    }
    return median(std::move(slownesses));
  }

  /// Arrivals earlier than all near them, by time.
  std::vector<std::size_t> early_arrivals() const {
    std::vector<std::size_t> early;
    for (std::size_t i = 0; i < count(); ++i) {
      bool first = true;
      for (std::size_t j = 0; j < count(); ++j)
        first = first && (arrivals_.times_min[i] <= arrivals_.times_min[j] ||
                          apart(i, j) > near_spacings * region_.spacing_um);
      if (first) early.push_back(i);
    }
    std::stable_sort(early.begin(), early.end(), [&](std::size_t a, std::size_t b) {
      return arrivals_.times_min[a] < arrivals_.times_min[b];
    });
    return early;
  }

  /// Log density with which a birth proposes this source: around some nucleus, a little before it.
  double log_birth_density(const State& state, const FrontSource& source) const {
    double sum = 0;
    for (std::size_t i = 0; i < count(); ++i) {
      const auto [reach, early, width] = birth_scales(state, i);
      const double dx = (source.place.x - arrivals_.places_um[i].x) / reach;
      if (std::abs(dx) > 6) continue;
      double log_one = -0.5 * dx * dx - std::log(reach);
      if (!on_line()) {
        const double dy = (source.place.y - arrivals_.places_um[i].y) / reach;
        log_one += -0.5 * dy * dy - std::log(reach) - 0.5 * std::log(2 * std::numbers::pi);
      }
      const double dt = (source.start - arrivals_.times_min[i] + early) / width;
      log_one += -0.5 * dt * dt - std::log(width) - std::log(2 * std::numbers::pi);
      sum += std::exp(log_one);
    }
    return sum > 0 ? std::log(sum / static_cast<double>(count())) : -infinity;
  }

  FrontSource born(const State& state, Dice& dice) const {
    const auto i = static_cast<std::size_t>(dice.whole(static_cast<int>(count())));
    const auto [reach, early, width] = birth_scales(state, i);
    FrontSource source;
    source.place = {arrivals_.places_um[i].x + reach * dice.normal(), 0};
    if (!on_line()) source.place.y = arrivals_.places_um[i].y + reach * dice.normal();
    source.start = arrivals_.times_min[i] - early + width * dice.normal();
    set_arrivals(state, source);
    return source;
  }

 private:
  static constexpr double near_spacings = 1.6;

  double apart(std::size_t i, std::size_t j) const {
    return std::hypot(arrivals_.places_um[i].x - arrivals_.places_um[j].x,
                      arrivals_.places_um[i].y - arrivals_.places_um[j].y);
  }

  struct BirthScales {
    double reach, early, width;
  };
  BirthScales birth_scales(const State& state, std::size_t i) const {
    const double reach = 0.5 * region_.spacing_um;
    const double passing = 0.4 * region_.spacing_um * std::exp(state.curve.log_level);
    const double error = std::hypot(std::exp(state.log_jitter), arrivals_.se_min[i]);
    return {reach, passing, passing + error};
  }

  bool all_active(const State& state) const {
    if (state.sources.size() < 2) return true;
    std::vector<char> first(state.sources.size(), 0);
    for (const int label : state.label) first[label] = 1;
    if (std::find(first.begin(), first.end(), 0) != first.end()) return false;
    for (std::size_t k = 0; k < state.sources.size(); ++k) {
      const auto& own = state.sources[k];
      for (std::size_t j = 0; j < state.sources.size(); ++j) {
        if (j != k &&
            state.sources[j].start + travel(state, state.sources[j], own.place, own.depth) <
                own.start)
          return false;
      }
    }
    return true;
  }

  const Arrivals& arrivals_;
  const SourceRegion& region_;
  JitterPrior prior_;
  double earliest_ = 0, latest_ = 0, log_stray_ = 0;
  int knots_ = 2;
  double knot_step_ = 1;
};

/// One Markov chain at one temperature.
class Chain {
 public:
  Chain(const Model& model, double coolness, std::uint64_t seed, std::uint64_t stream)
      : model_(model), coolness_(coolness), dice_(seed, stream) {
    begin(stream % 2 == 0);
  }

  State& state() { return state_; }
  const State& state() const { return state_; }
  double coolness() const { return coolness_; }
  double log_prior() const { return log_prior_; }
  void exchange(Chain& other) {
    std::swap(state_, other.state_);
    std::swap(log_prior_, other.log_prior_);
  }
  double uniform() { return dice_.uniform(); }

  void step() {
    const double choice = dice_.uniform();
    if (choice < 0.2) return move_start();
    if (choice < 0.4) return move_place();
    if (choice < 0.5) return move_level();
    if (choice < 0.6) return move_offset();
    if (choice < 0.68) return move_jitter();
    if (choice < 0.71) return move_variation();
    if (choice < 0.81) return give_birth();
    if (choice < 0.91) return let_die();
    relocate();
  }

 private:
  FrontSource source_at_arrival(std::size_t i) const {
    const auto& region = model_.region();
    FrontSource source;
    source.place = model_.arrivals().places_um[i];
    source.place.x = std::clamp(source.place.x, region.left_um, region.right_um);
    source.place.y =
        model_.on_line() ? 0 : std::clamp(source.place.y, region.upper_um, region.lower_um);
    source.start = model_.arrivals().times_min[i];
    model_.set_arrivals(state_, source);
    return source;
  }

  /// By turns one source alone, with all else jitter, and a source at every nucleus that is earlier
  /// than its neighbours: from either end the chain finds what lies between.
  void begin(bool rich) {
    const auto& arrivals = model_.arrivals();
    const double range =
        *std::max_element(arrivals.times_min.begin(), arrivals.times_min.end()) - model_.earliest();
    const double length = model_.region().right_um - model_.region().left_um;
    const double slowness = rich ? model_.neighbour_slowness() : range / length;
    state_.curve.log_level = std::clamp(std::log(std::max(slowness, 1e-6)),
                                        least_log_slowness + 0.1, most_log_slowness - 0.1);
    state_.curve.offsets.assign(model_.knots(), 0);
    state_.log_jitter = std::log(std::clamp(range / (rich ? 20 : 4), 0.05, 6.0));
    state_.log_variation = std::log(usual_variation / 2);
    model_.set_curve(state_);
    for (const auto i : model_.early_arrivals()) {
      if (!state_.sources.empty() && !rich) break;
      if (state_.sources.size() == most_sources) break;
      proposed_ = state_;
      proposed_.sources.push_back(source_at_arrival(i));
      if (model_.settle(proposed_)) state_ = proposed_;
    }
    log_prior_ = model_.log_prior(state_);
  }

  /// Takes the proposal with the Metropolis–Hastings probability.
  void decide(State& proposed, double log_proposal_ratio) {
    const double prior = model_.log_prior(proposed);
    if (!std::isfinite(prior) || !model_.settle(proposed)) return;
    const double log_ratio = coolness_ * (proposed.log_likelihood - state_.log_likelihood) + prior -
                             log_prior_ + log_proposal_ratio;
    if (std::log(dice_.uniform()) >= log_ratio) return;
    std::swap(state_, proposed);
    log_prior_ = prior;
  }

  double stretch() {
    // Small and large steps by turns, wider for the warmer chains.
    constexpr double least = 0.1;
    return least * std::pow(1 / least, 1.3 * dice_.uniform()) / std::sqrt(coolness_);
  }

  int some_source() { return dice_.whole(static_cast<int>(state_.sources.size())); }

  double error_scale() const { return std::exp(state_.log_jitter) + 0.05; }

  void move_start() {
    State& proposed = proposed_ = state_;
    auto& source = proposed.sources[some_source()];
    const double by = stretch() * error_scale() * dice_.normal();
    source.start += by;
    for (double& arrival : source.arrivals) arrival += by;
    decide(proposed, 0);
  }

  void move_place() {
    State& proposed = proposed_ = state_;
    const int which = some_source();
    auto& source = proposed.sources[which];
    const double reach = model_.region().spacing_um * stretch();
    source.place.x += reach * dice_.normal();
    if (!model_.on_line()) source.place.y += reach * dice_.normal();
    model_.set_arrivals(proposed, source);
    if (dice_.uniform() < 0.3) return decide(proposed, 0);
    hold_front(proposed, which);
    decide_turned(proposed);
  }

  /// Shifts a source's start so that its front reaches its nuclei on average when it did: what
  /// counts for the likelihood hardly moves. The shift depends on all but the start, so volumes
  /// are kept.
  void hold_front(State& proposed, int which) const {
    auto& source = proposed.sources[which];
    double change = 0, members = 0;
    for (std::size_t i = 0; i < state_.label.size(); ++i) {
      if (state_.label[i] != which) continue;
      change += source.arrivals[i] - state_.sources[which].arrivals[i];
      ++members;
    }
    if (members == 0) return;
    source.start -= change / members;
    for (double& arrival : source.arrivals) arrival -= change / members;
  }

  void turn(State& proposed) const {
    model_.set_curve(proposed);
    for (int k = 0; k < static_cast<int>(proposed.sources.size()); ++k) hold_front(proposed, k);
  }

  /// The way back holds the fronts at the proposal's labels; where they changed it is another way.
  bool same_labels(const State& proposed) const { return proposed.label == state_.label; }

  void decide_turned(State& proposed) {
    const double prior = model_.log_prior(proposed);
    if (!std::isfinite(prior) || !model_.settle(proposed) || !same_labels(proposed)) return;
    const double log_ratio =
        coolness_ * (proposed.log_likelihood - state_.log_likelihood) + prior - log_prior_;
    if (std::log(dice_.uniform()) >= log_ratio) return;
    std::swap(state_, proposed);
    log_prior_ = prior;
  }

  void change_curve(State& proposed) {
    if (dice_.uniform() < 0.7) {
      turn(proposed);
      return decide_turned(proposed);
    }
    model_.set_curve(proposed);
    decide(proposed, 0);
  }

  void move_level() {
    State& proposed = proposed_ = state_;
    proposed.curve.log_level += 0.1 * stretch() * dice_.normal();
    change_curve(proposed);
  }

  void move_offset() {
    State& proposed = proposed_ = state_;
    const double by = std::exp(state_.log_variation) * stretch() * dice_.normal();
    proposed.curve.offsets[dice_.whole(model_.knots())] += by;
    change_curve(proposed);
  }

  void move_jitter() {
    State& proposed = proposed_ = state_;
    proposed.log_jitter += 0.4 * stretch() * dice_.normal();
    decide(proposed, 0);
  }

  void move_variation() {
    State& proposed = proposed_ = state_;
    const double by = 0.5 * stretch() * dice_.normal();
    proposed.log_variation += by;
    // Offsets keep their size relative to it: one factor each in volume.
    for (double& offset : proposed.curve.offsets) offset *= std::exp(by);
    model_.set_curve(proposed);
    decide(proposed, by * model_.knots());
  }

  void give_birth() {
    if (state_.sources.size() >= most_sources) return;
    State& proposed = proposed_ = state_;
    proposed.sources.push_back(model_.born(state_, dice_));
    decide(proposed, -model_.log_birth_density(state_, proposed.sources.back()));
  }

  void let_die() {
    if (state_.sources.size() < 2) return;
    State& proposed = proposed_ = state_;
    const int which = some_source();
    const double density = model_.log_birth_density(state_, state_.sources[which]);
    proposed.sources.erase(proposed.sources.begin() + which);
    decide(proposed, density);
  }

  void relocate() {
    State& proposed = proposed_ = state_;
    auto& source = proposed.sources[some_source()];
    const double back = model_.log_birth_density(state_, source);
    source = model_.born(state_, dice_);
    decide(proposed, back - model_.log_birth_density(state_, source));
  }

  const Model& model_;
  double coolness_;
  Dice dice_;
  State state_, proposed_;
  double log_prior_ = 0;
};

/// Chains from cold to warm that exchange states.
class Ladder {
 public:
  Ladder(const Model& model, std::uint64_t seed) {
    const std::vector<double> coolnesses{1.0, 0.55, 0.28, 0.12};
    for (std::size_t i = 0; i < coolnesses.size(); ++i)
      chains_.emplace_back(model, coolnesses[i], seed, i);
  }

  void run(int steps) {
    constexpr int between_exchanges = 10;
    for (int i = 0; i < steps; i += between_exchanges) {
      for (auto& chain : chains_)
        for (int j = 0; j < between_exchanges; ++j) chain.step();
      exchange();
    }
  }

  const State& cold() const { return chains_.front().state(); }

 private:
  void exchange() {
    for (std::size_t i = chains_.size() - 1; i > 0; --i) {
      auto& cold = chains_[i - 1];
      auto& warm = chains_[i];
      const double log_ratio = (cold.coolness() - warm.coolness()) *
                               (warm.state().log_likelihood - cold.state().log_likelihood);
      if (std::log(cold.uniform()) < log_ratio) cold.exchange(warm);
    }
  }

  std::vector<Chain> chains_;
};

SourceDraw drawn(const Model& model, const State& state) {
  SourceDraw draw;
  for (const auto& source : state.sources) {
    draw.places_um.push_back(source.place);
    draw.starts_min.push_back(source.start);
  }
  draw.depth_min = state.depth;
  draw.field_min = state.field;
  draw.source = state.label;
  draw.jitter_min = std::exp(state.log_jitter);
  const auto& places = model.arrivals().places_um;
  const auto by_x = [](Point a, Point b) { return a.x < b.x; };
  const auto [left, right] = std::minmax_element(places.begin(), places.end(), by_x);
  draw.slowness_min_per_um =
      right->x > left->x ? (model.depth_at(state, right->x) - model.depth_at(state, left->x)) /
                               (right->x - left->x)
                         : model.slowness_at(state, left->x);
  return draw;
}

void set_slowness(SourceFit& fit) {
  const auto count = static_cast<double>(fit.draws.size());
  double mean = 0, square = 0;
  for (const auto& draw : fit.draws) mean += draw.slowness_min_per_um / count;
  for (const auto& draw : fit.draws)
    square += (draw.slowness_min_per_um - mean) * (draw.slowness_min_per_um - mean) / count;
  fit.slowness_min_per_um = mean;
  fit.slowness_se_min_per_um = std::sqrt(square);
}

SourceFit sampled(const Arrivals& arrivals, const SourceRegion& region, const SourceRules& rules,
                  JitterPrior prior, std::uint64_t stream, int burn_in, int thinning) {
  const Model model(arrivals, region, rules.period_min, prior);
  Ladder ladder(model, rules.seed + 7919 * stream);
  ladder.run(burn_in);
  SourceFit fit;
  std::vector<double> jitters, stray(arrivals.times_min.size(), 0.0);
  for (int i = 0; i < rules.draws; ++i) {
    ladder.run(thinning);
    fit.draws.push_back(drawn(model, ladder.cold()));
    jitters.push_back(fit.draws.back().jitter_min);
    for (std::size_t j = 0; j < stray.size(); ++j) stray[j] += model.is_stray(ladder.cold(), j);
  }
  fit.jitter_min = median(std::move(jitters));
  set_slowness(fit);
  for (const double count : stray) fit.astray.push_back(2 * count > rules.draws);
  return fit;
}

}  // namespace

SourceRegion source_region(const Tube& tube, const std::vector<Arrivals>& waves, double spacing_um,
                           bool line) {
  SourceRegion region{infinity, -infinity, infinity, -infinity, spacing_um};
  for (const auto& wave : waves) {
    for (const auto& place : wave.places_um) {
      region.left_um = std::min(region.left_um, place.x);
      region.right_um = std::max(region.right_um, place.x);
      region.upper_um = std::min(region.upper_um, place.y);
      region.lower_um = std::max(region.lower_um, place.y);
    }
  }
  if (tube.measured && tube.length_um > 0) {
    region.left_um = std::min(region.left_um, 0.0);
    region.right_um = std::max(region.right_um, tube.length_um);
    region.upper_um = std::min(region.upper_um, -tube.width_um / 2);
    region.lower_um = std::max(region.lower_um, tube.width_um / 2);
  }
  // A front from outside is a line across at some distance from its source.
  const double outside = std::max(2 * spacing_um, line ? 0.0 : region.lower_um - region.upper_um);
  if (tube.left_end == Boundary::open) region.left_um -= outside;
  if (tube.right_end == Boundary::open) region.right_um += outside;
  if (!line && tube.upper_wall == Boundary::open) region.upper_um -= outside;
  if (!line && tube.lower_wall == Boundary::open) region.lower_um += outside;
  if (line) region.upper_um = region.lower_um = 0;
  if (region.right_um - region.left_um < spacing_um) region.right_um = region.left_um + spacing_um;
  return region;
}

std::vector<SourceFit> fit_sources(const std::vector<Arrivals>& waves, const SourceRegion& region,
                                   const SourceRules& rules) {
  std::vector<double> jitters;
  SourceRules quick = rules;
  quick.draws = 60;
  for (std::size_t i = 0; i < waves.size(); ++i) {
    if (waves[i].times_min.size() < least_arrivals) continue;
    jitters.push_back(sampled(waves[i], region, quick, {}, 2 * i, 3000, 30).jitter_min);
  }
  // A wave whose sources are not resolved takes them for jitter: the tighter ones know better.
  const double common = quantile(jitters, 0.25);
  std::vector<SourceFit> fits(waves.size());
  for (std::size_t i = 0; i < waves.size(); ++i) {
    if (waves[i].times_min.size() >= least_arrivals)
      fits[i] =
          sampled(waves[i], region, rules, {jitters.size() > 1 ? common : 0}, 2 * i + 1, 4000, 25);
    fits[i].astray.resize(waves[i].times_min.size(), 0);
    if (fits[i].draws.empty()) fits[i].jitter_min = common;
  }
  return fits;
}

}  // namespace wavefount
