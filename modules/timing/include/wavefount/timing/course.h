#pragma once

#include <cstddef>
#include <vector>

#include "wavefount/core/nucleus.h"

namespace wavefount {

/// Aperture signal of one nucleus with what was found of it, by time; only finite values.
struct Course {
  std::vector<int> frame;
  std::vector<double> time_min, signal, variance;
  std::vector<bool> found;     ///< sighted in that frame
  double interval_min = 0;     ///< median step
  double noise = 0;            ///< of one value, counts: stated or seen between neighbours
  std::vector<double> smooth;  ///< running median of three

  std::size_t size() const { return frame.size(); }
};

/// From the trace, leaving out frames outside [first_min, last_min]. Without a trace the found
/// points' brightness stands for it, which shows no fall.
Course make_course(const Nucleus& nucleus, const ApertureTrace* trace, double first_min,
                   double last_min);

/// One fall of the signal. Positions are indices into the course.
struct Fall {
  std::size_t peak = 0;        ///< the highest before it
  std::size_t last_high = 0;   ///< last value near the level before
  std::size_t half = 0;        ///< first value below half way
  std::size_t low = 0;         ///< first value clearly down
  std::size_t valley = 0;      ///< the lowest after it
  std::size_t end = 0;         ///< one past the last value before the signal rises again
  double level = 0, base = 0;  ///< medians before and after, counts

  /// From last_high to low, minutes.
  double duration_min(const Course& course) const;
};

/// The falls of a course and whether it starts empty.
struct Swings {
  bool starts_low = false;
  std::vector<Fall> falls;
};

/// Alternating highs and lows whose swing is both a good part of the signal and well above its
/// noise. A dip that springs back at once (focus, a shadow, a bad frame) is no fall: a nucleus
/// that forms anew starts small.
Swings find_swings(const Course& course);

}  // namespace wavefount
