#pragma once

#include <cstdint>

namespace wavefount {

/// Random numbers by place, not by order: the value at a counter depends on seed, stream and
/// counter alone, so that the same bytes come out on any number of threads. The mixer is the
/// finaliser of SplitMix64 (Steele, Lea & Flood, OOPSLA 2014), applied twice.
class CounterRandom {
 public:
  explicit CounterRandom(std::uint64_t seed, std::uint64_t stream = 0);

  std::uint64_t bits(std::uint64_t counter) const {
    return mixed(mixed(counter * 0x9e3779b97f4a7c15ULL + key_) ^ key_);
  }
  /// In the open interval (0, 1).
  double uniform(std::uint64_t counter) const;
  /// Standard normal, by the inverse distribution function.
  double normal(std::uint64_t counter) const;

  static std::uint64_t mixed(std::uint64_t value) {
    value = (value ^ (value >> 30)) * 0xbf58476d1ce4e5b9ULL;
    value = (value ^ (value >> 27)) * 0x94d049bb133111ebULL;
    return value ^ (value >> 31);
  }

 private:
  std::uint64_t key_;
};

/// The same numbers taken one after the other, for laying out a scene.
class RandomSequence {
 public:
  explicit RandomSequence(std::uint64_t seed, std::uint64_t stream = 0) : random_(seed, stream) {}
  double uniform() { return random_.uniform(next_++); }
  double uniform(double from, double to) { return from + (to - from) * uniform(); }
  double normal() { return random_.normal(next_++); }

 private:
  CounterRandom random_;
  std::uint64_t next_ = 0;
};

/// Quantile of the standard normal distribution, relative error below 1.2e-9 (Acklam 2003).
double normal_quantile(double share);

}  // namespace wavefount
