#pragma once

#include <stdexcept>
#include <string>

namespace wavefount {

/// What went wrong, in one sentence that a user can act on: which file, what is wrong, what to do.
/// Thrown across modules; the engine turns it into the message of the acquisition that it stopped.
class Problem : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
  ~Problem() override;
};

}  // namespace wavefount
