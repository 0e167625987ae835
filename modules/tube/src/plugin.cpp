#include "wavefount/core/plugin.h"

#include "steps.h"

WAVEFOUNT_PLUGIN(
    "Reads ahead, finds the tubes, reduces frames, and removes the drift of the stage.",
    wavefount::tube::ScanAhead, wavefount::tube::FindTube, wavefount::tube::PlanReduction,
    wavefount::tube::ReduceFrames, wavefount::tube::RegisterFrames, wavefount::tube::RemoveDrift)
