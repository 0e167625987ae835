#pragma once

#include <string>

#include "wavefount/core/record_store.h"
#include "wavefount/pictures/canvas.h"

namespace wavefount {

/// The pictures of one acquisition, each from whatever records exist (`film` must). `name` is the
/// acquisition's, for the title. The same records give the same pixels.

/// Light along the tube (µm, across) against time (minutes, downwards), with entries, fitted fronts
/// and origins drawn over it. Without `reduced-film` the ground is plain.
Canvas draw_kymograph(const RecordStore& records, const std::string& name);

/// The tube to scale once a wave, nuclei coloured by when they entered, origins marked.
Canvas draw_map(const RecordStore& records, const std::string& name);

/// A few frames as recorded, with outlines and numbers of nuclei. Without `reduced-film` the
/// outlines stand on a plain ground.
Canvas draw_montage(const RecordStore& records, const std::string& name);

/// Brightness of a few nuclei spread over the tube, with fitted import and entries.
Canvas draw_curves(const RecordStore& records, const std::string& name);

}  // namespace wavefount
