#pragma once

#include <functional>

#include "pipeline.h"
#include "stage_clock.h"
#include "wavefount/core/observations.h"

namespace wavefount {

/// Reads every frame of a film once, in parallel with a bounded number in flight, and passes it
/// through the frame steps. `film` holds the records made so far. A plane that cannot be read makes
/// its frame unusable, with the sentence why; a Problem from a step is thrown on. `on_frame` is
/// called in order of frames, from one thread at a time. Throws Interrupted.
Observations stream_frames(const FrameSource& source, const std::vector<FrameStep::Pointer>& steps,
                           const RecordStore& film, int tokens, StageClock& clock,
                           const std::function<void()>& on_frame);

}  // namespace wavefount
