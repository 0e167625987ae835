#include "progress.h"

#include <unistd.h>

#include <cstdio>

namespace wavefount {
namespace {

using Clock = std::chrono::steady_clock;
constexpr auto redraw_every = std::chrono::milliseconds(200);
/// Before that the guess of the remaining time jumps about.
constexpr double first_guess_after_s = 2;

}  // namespace

Progress::Progress(std::int64_t frames, int films)
    : on_terminal_(isatty(STDOUT_FILENO) == 1),
      frames_(frames),
      films_(films),
      start_(Clock::now()),
      last_drawn_(start_) {}

void Progress::frame_done() {
  const std::lock_guard guard(mutex_);
  ++frames_done_;
  draw(false);
}

void Progress::film_done() {
  const std::lock_guard guard(mutex_);
  ++films_done_;
  draw(true);
}

void Progress::say(const std::string& line) {
  const std::lock_guard guard(mutex_);
  if (drawn_) std::fputs("\r\033[K", stdout);
  drawn_ = false;
  std::fprintf(stdout, "%s\n", line.c_str());
  std::fflush(stdout);
}

void Progress::finish() {
  const std::lock_guard guard(mutex_);
  if (drawn_) std::fputs("\r\033[K", stdout);
  drawn_ = false;
  std::fflush(stdout);
}

std::string Progress::remaining() const {
  const double passed = std::chrono::duration<double>(Clock::now() - start_).count();
  if (frames_done_ == 0 || passed < first_guess_after_s) return "";
  const double left =
      passed * static_cast<double>(frames_ - frames_done_) / static_cast<double>(frames_done_);
  const auto seconds = static_cast<long>(left + 0.5);
  if (seconds < 90) return ", about " + std::to_string(seconds) + " s left";
  return ", about " + std::to_string((seconds + 30) / 60) + " min left";
}

void Progress::draw(bool force) {
  if (!on_terminal_ || frames_ == 0) return;
  const auto now = Clock::now();
  if (!force && now - last_drawn_ < redraw_every) return;
  last_drawn_ = now;
  drawn_ = true;
  const auto percent = static_cast<int>(100 * frames_done_ / frames_);
  std::fprintf(stdout, "\r\033[K%3d %%  %d of %d films, frame %lld of %lld%s", percent, films_done_,
               films_, static_cast<long long>(frames_done_), static_cast<long long>(frames_),
               remaining().c_str());
  std::fflush(stdout);
}

}  // namespace wavefount
