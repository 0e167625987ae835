#include "wavefount/timing/split.h"

#include <algorithm>

namespace wavefount {

namespace {

constexpr int fewest_found = 2;
// A nucleus may be missed in a few last frames and still be there.
constexpr int missed_frames = 3;
// Found in more of the frames after a fall than this, it was only dimmed.
constexpr double still_found_share = 0.7;
constexpr std::size_t fewest_after = 4;
// An aperture at a first frame this full (of the later height) held the nucleus already.
constexpr double full_share = 0.3;

bool only_dimmed(const Course& course, const Fall& fall) {
  const std::size_t from = fall.low + 1;
  if (fall.end < from + fewest_after) return false;
  std::size_t found = 0;
  for (std::size_t i = from; i < fall.end; ++i) found += course.found[i];
  return static_cast<double>(found) > still_found_share * static_cast<double>(fall.end - from);
}

struct Stretch {
  std::size_t from = 0, to = 0;  // values from <= i < to
  std::optional<Fall> fall;
};

std::vector<Stretch> stretches_of(const Course& course, const Swings& swings) {
  std::vector<Stretch> stretches;
  std::size_t from = 0;
  for (const auto& fall : swings.falls) {
    if (only_dimmed(course, fall)) continue;
    stretches.push_back({from, fall.half, fall});
    from = fall.valley;
  }
  if (from < course.size()) stretches.push_back({from, course.size(), std::nullopt});
  return stretches;
}

// Formation was seen when the aperture was empty before.
bool formation_seen(const Course& course, const Stretch& stretch, const Swings& swings,
                    std::size_t first_found) {
  if (first_found == 0) return false;
  if (stretch.from > 0) return true;
  if (!swings.starts_low) return false;
  const double highest = *std::max_element(
      course.smooth.begin(), course.smooth.begin() + static_cast<std::ptrdiff_t>(stretch.to));
  return course.smooth[0] < full_share * highest;
}

Outcome outcome_of(const Course& course, const Stretch& stretch, std::size_t last_found,
                   int last_frame) {
  if (stretch.fall) return Outcome::entered;
  const bool to_the_end = course.frame[last_found] + missed_frames >= last_frame;
  return to_the_end ? Outcome::unfinished : Outcome::lost;
}

}  // namespace

std::vector<OpenInterphase> split_course(const Course& course, int last_frame) {
  const auto swings = find_swings(course);
  std::vector<OpenInterphase> result;
  for (const auto& stretch : stretches_of(course, swings)) {
    std::size_t first = course.size(), last = 0;
    int count = 0;
    for (std::size_t i = stretch.from; i < stretch.to; ++i)
      if (course.found[i]) {
        first = std::min(first, i);
        last = i;
        ++count;
      }
    if (count < std::min<int>(fewest_found, static_cast<int>(course.size()))) continue;
    OpenInterphase open;
    open.start = first;
    open.fall = stretch.fall;
    auto& own = open.interphase;
    own.index = static_cast<int>(result.size());
    own.first_frame = course.frame[first];
    own.last_frame = course.frame[last];
    own.start =
        formation_seen(course, stretch, swings, first) ? Start::seen : Start::already_present;
    own.outcome = outcome_of(course, stretch, last, last_frame);
    if (own.start == Start::seen) own.formed_min = course.time_min[first];
    result.push_back(std::move(open));
  }
  return result;
}

}  // namespace wavefount
