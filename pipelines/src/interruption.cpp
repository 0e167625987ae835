#include "interruption.h"

#include <unistd.h>

#include <atomic>
#include <csignal>

namespace wavefount {
namespace {

std::atomic<bool> asked_to_stop{false};
static_assert(std::atomic<bool>::is_always_lock_free, "used in a signal handler");

constexpr int status_after_interrupt = 130;

void on_signal(int /*signal*/) {
  if (asked_to_stop.exchange(true)) _exit(status_after_interrupt);
}

}  // namespace

void listen_for_interruption() {
  struct sigaction action {};
  action.sa_handler = on_signal;
  sigemptyset(&action.sa_mask);
  action.sa_flags = SA_RESTART;
  sigaction(SIGINT, &action, nullptr);
  sigaction(SIGTERM, &action, nullptr);
}

bool interrupted() {
  return asked_to_stop.load(std::memory_order_relaxed);
}

}  // namespace wavefount
