#pragma once

#include <string>
#include <vector>

namespace wavefount {

/// One thing for a person to look at that is not a wave's own reason.
struct Doubt {
  std::string reason;   ///< a word or two, for the `reason` column
  std::string detail;   ///< a sentence
  double priority = 0;  ///< 0 to 1, higher first
};

/// Doubts about the acquisition as a whole; steps add to it.
struct Doubts {
  static constexpr const char* record_name = "doubts";
  std::vector<Doubt> doubts;
};

}  // namespace wavefount
