#include "wavefount/core/plugin.h"

#include "find_nuclei_step.h"
#include "measure_places_step.h"
#include "outline_nuclei_step.h"
#include "write_labels_step.h"

WAVEFOUNT_PLUGIN("Finds, outlines and measures nuclei, and paints them as labels.",
                 wavefount::nuclei::FindNuclei, wavefount::nuclei::OutlineNuclei,
                 wavefount::nuclei::MeasurePlaces, wavefount::nuclei::WriteLabels)
