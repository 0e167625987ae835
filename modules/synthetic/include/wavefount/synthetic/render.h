#pragma once

#include <memory>

#include "wavefount/core/image.h"
#include "wavefount/synthetic/scene.h"

namespace wavefount {

/// Renders the frames of one scene. What stands still is computed once; a frame costs one pass over
/// its pixels and small windows around the nuclei. Thread-safe once constructed.
class SceneRenderer {
 public:
  explicit SceneRenderer(const Scene& scene);
  ~SceneRenderer();

  /// The frame as the camera records it, whole counts; depends on the scene and the frame alone.
  ImagePointer frame(int frame) const;
  /// The light before the camera: counts above the dark offset, without noise.
  ImagePointer light(int frame) const;

 private:
  struct Layers;
  const Scene scene_;
  std::unique_ptr<const Layers> layers_;
};

/// One frame of a scene; for many frames of one scene keep a SceneRenderer.
ImagePointer render_frame(const Scene& scene, int frame);

}  // namespace wavefount
