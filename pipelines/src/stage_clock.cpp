#include "stage_clock.h"

#include <utility>

namespace wavefount {

StageClock::StageClock(std::vector<std::string> stages) : order_(std::move(stages)) {
  for (const auto& stage : order_)
    nanoseconds_[stage] = std::make_unique<std::atomic<std::int64_t>>(0);
}

void StageClock::add(const std::string& stage, std::chrono::nanoseconds time) {
  nanoseconds_.at(stage)->fetch_add(time.count(), std::memory_order_relaxed);
}

std::vector<std::pair<std::string, double>> StageClock::seconds() const {
  std::vector<std::pair<std::string, double>> seconds;
  for (const auto& stage : order_)
    seconds.emplace_back(stage, static_cast<double>(nanoseconds_.at(stage)->load()) * 1e-9);
  return seconds;
}

StageTimer::StageTimer(StageClock& clock, std::string stage)
    : clock_(clock), stage_(std::move(stage)), start_(std::chrono::steady_clock::now()) {}

StageTimer::~StageTimer() {
  clock_.add(stage_, std::chrono::steady_clock::now() - start_);
}

}  // namespace wavefount
