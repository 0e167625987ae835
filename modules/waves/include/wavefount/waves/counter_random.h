#pragma once

#include <cstdint>

namespace wavefount {

/// Random numbers by position: the same seed, stream and index give the same number whatever was
/// drawn before, so that results do not depend on order or threads. The hash is the finaliser of
/// SplitMix64 (Steele, Lea & Flood 2014).
class CounterRandom {
 public:
  explicit CounterRandom(std::uint64_t seed) : seed_(seed) {}

  /// 0 < u < 1.
  double uniform(std::uint64_t stream, std::uint64_t index) const;
  /// Standard normal (Box & Muller 1958).
  double normal(std::uint64_t stream, std::uint64_t index) const;
  /// 0 <= whole number < count.
  int whole(std::uint64_t stream, std::uint64_t index, int count) const;

 private:
  std::uint64_t bits(std::uint64_t stream, std::uint64_t index) const;

  std::uint64_t seed_;
};

}  // namespace wavefount
