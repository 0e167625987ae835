#pragma once

#include <cstdint>
#include <string_view>

namespace wavefount {

/// Seed of one item (an acquisition, a wave) from a seed and the item's name, the same on every
/// machine (FNV-1a over the name, then SplitMix64; Steele, Lea & Flood 2014, OOPSLA).
std::uint64_t seed_from(std::uint64_t seed, std::string_view name);

/// Random numbers that depend on seed and counter alone, never on the order of calls elsewhere:
/// number n of a stream is SplitMix64's finaliser at seed + n · golden ratio.
class RandomStream {
 public:
  explicit RandomStream(std::uint64_t seed) : state_(seed) {}

  std::uint64_t bits();
  /// 0 < value < 1.
  double uniform();
  /// Mean 0, standard deviation 1 (inverse of the normal distribution function; Acklam's rational
  /// approximation refined by one Halley step, full double precision).
  double normal();

 private:
  std::uint64_t state_;
};

/// The z of which a standard normal value stays below with probability `share` (0 < share < 1).
double normal_quantile(double share);

}  // namespace wavefount
