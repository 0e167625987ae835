#include "wavefount/core/wave.h"

namespace wavefount {

std::string name_of(Fate fate) {
  switch (fate) {
    case Fate::confirmed:
      return "confirmed";
    case Fate::terminal:
      return "terminal";
    case Fate::unconfirmed:
      return "unconfirmed";
  }
  return {};
}

std::string name_of(Answer answer) {
  switch (answer) {
    case Answer::too_few:
      return "too-few";
    case Answer::synchronous:
      return "synchronous";
    case Answer::incoherent:
      return "incoherent";
    case Answer::enters_view:
      return "enters-view";
    case Answer::coexisting:
      return "coexisting";
    case Answer::single:
      return "single";
    case Answer::ambiguous:
      return "ambiguous";
  }
  return {};
}

std::string name_of(Site site) {
  switch (site) {
    case Site::end:
      return "end";
    case Site::wall:
      return "wall";
    case Site::interior:
      return "interior";
    case Site::view_edge:
      return "view-edge";
  }
  return {};
}

std::string name_of(Timing timing) {
  switch (timing) {
    case Timing::leads:
      return "leads";
    case Timing::with_front:
      return "with-front";
    case Timing::lags:
      return "lags";
    case Timing::out_of_step:
      return "out-of-step";
    case Timing::alone:
      return "alone";
    case Timing::none:
      return "none";
  }
  return {};
}

}  // namespace wavefount
