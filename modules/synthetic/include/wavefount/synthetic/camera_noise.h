#pragma once

#include "wavefount/core/image.h"
#include "wavefount/synthetic/scene.h"

namespace wavefount {

/// Turns expected light (counts above the dark offset) into what the camera records: shot noise of
/// the electrons, read noise, dark offset, whole counts, clipped to the bit depth. Depends on seed,
/// frame and pixel alone.
void expose(Image& light, const SceneCamera& camera, std::uint64_t seed, int frame);

}  // namespace wavefount
