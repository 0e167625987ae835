#include "wavefount/waves/counter_random.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace wavefount {
namespace {

std::uint64_t mixed(std::uint64_t value) {
  value += 0x9e3779b97f4a7c15U;
  value = (value ^ (value >> 30U)) * 0xbf58476d1ce4e5b9U;
  value = (value ^ (value >> 27U)) * 0x94d049bb133111ebU;
  return value ^ (value >> 31U);
}

}  // namespace

std::uint64_t CounterRandom::bits(std::uint64_t stream, std::uint64_t index) const {
  return mixed(mixed(mixed(seed_) ^ stream) ^ index);
}

double CounterRandom::uniform(std::uint64_t stream, std::uint64_t index) const {
  return (static_cast<double>(bits(stream, index) >> 11U) + 0.5) * 0x1p-53;
}

double CounterRandom::normal(std::uint64_t stream, std::uint64_t index) const {
  const double radius = std::sqrt(-2 * std::log(uniform(stream, 2 * index)));
  return radius * std::cos(2 * std::numbers::pi * uniform(stream, 2 * index + 1));
}

int CounterRandom::whole(std::uint64_t stream, std::uint64_t index, int count) const {
  return std::min(static_cast<int>(uniform(stream, index) * count), count - 1);
}

}  // namespace wavefount
