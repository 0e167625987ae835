#pragma once

#include <chrono>
#include <cstdint>
#include <mutex>
#include <string>

namespace wavefount {

/// What a person watches on a terminal (one line with remaining time), and what a script reads in a
/// pipe (a line an event, no line twice). Thread-safe.
class Progress {
 public:
  /// `frames`: of all films that will be read.
  Progress(std::int64_t frames, int films);

  void frame_done();
  /// Ends the watched line and prints a line that stays.
  void say(const std::string& line);
  void film_done();
  /// Removes the watched line.
  void finish();

 private:
  void draw(bool force);
  std::string remaining() const;

  const bool on_terminal_;
  const std::int64_t frames_;
  const int films_;
  std::int64_t frames_done_ = 0;
  int films_done_ = 0;
  bool drawn_ = false;
  const std::chrono::steady_clock::time_point start_;
  std::chrono::steady_clock::time_point last_drawn_;
  std::mutex mutex_;
};

}  // namespace wavefount
