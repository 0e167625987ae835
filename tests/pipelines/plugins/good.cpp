#include "counting_step.h"

WAVEFOUNT_PLUGIN("A good plug-in.", wavefount::CountingStep)
