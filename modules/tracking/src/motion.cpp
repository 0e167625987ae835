#include "motion.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>
#include <optional>

#include "wavefount/core/robust.h"

namespace wavefount::tracking {
namespace {

/// Degrees of freedom of the displacement's tails.
constexpr double tail_freedom = 6;
/// A centroid is never trusted beyond this part of a pixel: sampling, and a rest of the drift.
constexpr double centroid_px = 0.25;
/// Half the way to the nearest neighbour: beyond it a nearest partner may be the neighbour's.
constexpr double safe_share_of_spacing = 0.5;
/// A shift of the whole view is looked for this many spacings away; farther the drift would have
/// been wrong by more than the nuclei's own pattern repeats.
constexpr double jump_spacings = 2;
/// As a share of the spacing: how near a shifted nucleus must come to a sighting to count.
constexpr double jump_tolerance = 0.125;
/// With fewer nuclei on either side a shift of the whole view cannot be told from their motion.
constexpr int fewest_for_jump = 3;

std::optional<int> nearest(const FilmDetections& film, Point place, int step, double within) {
  std::optional<int> best;
  for (int one = film.first[step]; one < film.first[step + 1]; ++one) {
    const double away = distance(film.all[one].place_um, place);
    if (away < within) {
      within = away;
      best = one;
    }
  }
  return best;
}

/// Links of a step with the one before under a shift of the whole view.
std::vector<Link> mutual_nearest(const FilmDetections& film, int step, Point shift) {
  const double within = safe_share_of_spacing * film.spacing_um;
  std::vector<Link> links;
  for (int from = film.first[step - 1]; from < film.first[step]; ++from) {
    const auto to = nearest(film, film.all[from].place_um + shift, step, within);
    if (!to) continue;
    const auto back = nearest(film, film.all[*to].place_um - shift, step - 1, within);
    if (back == from) links.push_back({from, *to});
  }
  return links;
}

/// How many nuclei of the step before find a sighting under the shift, near misses in part.
double support(const FilmDetections& film, int step, Point shift) {
  const double tolerance = jump_tolerance * film.spacing_um;
  double sum = 0;
  for (int from = film.first[step - 1]; from < film.first[step]; ++from) {
    const Point expected = film.all[from].place_um + shift;
    const auto to = nearest(film, expected, step, tolerance);
    if (!to) continue;
    const double away = distance(film.all[*to].place_um, expected) / tolerance;
    sum += 1 - away * away;
  }
  return sum;
}

Point median_displacement(const FilmDetections& film, const std::vector<Link>& links) {
  std::vector<double> x, y;
  for (const auto& link : links) {
    const Point moved = film.all[link.to].place_um - film.all[link.from].place_um;
    x.push_back(moved.x);
    y.push_back(moved.y);
  }
  return {median(std::move(x)), median(std::move(y))};
}

/// The shift that brings most nuclei onto sightings, by trying the displacement of every pair; none
/// unless clearly better than standing still.
Point vote_shift(const FilmDetections& film, int step) {
  const double reach = jump_spacings * film.spacing_um;
  Point best;
  const double still = support(film, step, best);
  double most = still;
  for (int from = film.first[step - 1]; from < film.first[step]; ++from)
    for (int to = film.first[step]; to < film.first[step + 1]; ++to) {
      const Point shift = film.all[to].place_um - film.all[from].place_um;
      const double length = distance(shift, {});
      if (length > reach) continue;
      // Of two shifts that fit alike the shorter: nuclei lie in a nearly regular pattern.
      const double votes = support(film, step, shift) - 0.5 * length / reach;
      if (votes > most) {
        most = votes;
        best = shift;
      }
    }
  return most > 1.3 * still + 1 ? best : Point{};
}

int smaller_side(const FilmDetections& film, int step) {
  return std::min(film.first[step] - film.first[step - 1], film.first[step + 1] - film.first[step]);
}

/// Whether most nuclei have nothing near their place: emptying waves take a few at a time, so that
/// most of a view changes place only when the stage moves.
bool view_is_lost(const FilmDetections& film, int step) {
  return support(film, step, {}) < 0.5 * smaller_side(film, step);
}

double pooled_sd(const FilmDetections& film, const std::vector<Link>& links, const Flow& flow) {
  std::vector<double> deviations;
  for (const auto& link : links) {
    const auto& from = film.all[link.from];
    const auto& to = film.all[link.to];
    const Point off = to.place_um - from.place_um - flow.shift(from.place_um, from.step, to.step);
    const double minutes = film.time_min[to.step] - film.time_min[from.step];
    const double scale = std::sqrt(std::max(1.0, minutes / film.interval_min));
    deviations.push_back(off.x / scale);
    deviations.push_back(off.y / scale);
  }
  return robust_sd(deviations);
}

}  // namespace

double displacement_cost(double distance_um, double variance_um2) {
  return std::log(2 * std::numbers::pi * variance_um2) +
         (tail_freedom + 2) / 2 *
             std::log1p(distance_um * distance_um / (tail_freedom * variance_um2));
}

double log_ratio(double to, double from) {
  const double least = std::numeric_limits<double>::min();
  return std::log(std::max(to, least)) - std::log(std::max(from, least));
}

FirstLook first_look(const FilmDetections& film) {
  FirstLook look;
  look.common.assign(film.frames.size(), Point{});
  for (int step = 1; step < film.steps(); ++step) {
    Point shift;
    if (smaller_side(film, step) >= fewest_for_jump &&
        (film.jump[step] || view_is_lost(film, step)))
      shift = vote_shift(film, step);
    auto links = mutual_nearest(film, step, shift);
    const bool shifted = film.jump[step] || shift.x != 0 || shift.y != 0;
    if (shifted && static_cast<int>(links.size()) >= fewest_for_jump)
      shift = median_displacement(film, links);
    if (!film.jump[step] && (shift.x != 0 || shift.y != 0)) ++look.unreported_jumps;
    look.common[step] = shift;
    look.links.insert(look.links.end(), links.begin(), links.end());
  }
  return look;
}

Motion estimate_motion(const FilmDetections& film, const std::vector<Link>& links,
                       const Flow& flow) {
  Motion motion;
  const double floor_um = centroid_px * film.pixel_um;
  // With too few links to say, nuclei stray by a tenth of their radius a step.
  double sd = links.size() < 4 ? film.radius_um / 10 : pooled_sd(film, links, flow);
  sd = std::max(sd, floor_um);
  motion.place_variance_um2 = sd * sd / 2;
  motion.spread_um2_per_min = sd * sd / 2 / film.interval_min;
  std::vector<double> brightness, area;
  for (const auto& link : links) {
    brightness.push_back(log_ratio(film.all[link.to].brightness, film.all[link.from].brightness));
    area.push_back(log_ratio(film.all[link.to].area_um2, film.all[link.from].area_um2));
  }
  // Floors: changes below a few percent say nothing about which nucleus it is.
  motion.log_brightness_sd = std::max(0.05, robust_sd(brightness));
  motion.log_area_sd = std::max(0.05, robust_sd(area));
  return motion;
}

}  // namespace wavefount::tracking
