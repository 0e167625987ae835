#pragma once

#include <atomic>
#include <chrono>
#include <cstdint>
#include <map>
#include <memory>
#include <string>
#include <vector>

namespace wavefount {

/// Busy time of each stage, summed over threads. Stages are named before the work starts, so that
/// threads only add to counters.
class StageClock {
 public:
  explicit StageClock(std::vector<std::string> stages);

  void add(const std::string& stage, std::chrono::nanoseconds time);
  /// Seconds by stage, in the order named.
  std::vector<std::pair<std::string, double>> seconds() const;

 private:
  std::vector<std::string> order_;
  std::map<std::string, std::unique_ptr<std::atomic<std::int64_t>>> nanoseconds_;
};

/// Adds the time until it goes out of scope to one stage.
class StageTimer {
 public:
  StageTimer(StageClock& clock, std::string stage);
  ~StageTimer();
  StageTimer(const StageTimer&) = delete;
  StageTimer& operator=(const StageTimer&) = delete;

 private:
  StageClock& clock_;
  std::string stage_;
  std::chrono::steady_clock::time_point start_;
};

}  // namespace wavefount
