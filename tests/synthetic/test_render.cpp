#include <gtest/gtest.h>

#include <cmath>
#include <cstring>
#include <thread>

#include "scenes.h"
#include "wavefount/core/problem.h"
#include "wavefount/synthetic/blurred_disc.h"
#include "wavefount/synthetic/render.h"

namespace wavefount {
namespace {

double total(const Image& image) {
  double sum = 0;
  const float* pixels = image.GetBufferPointer();
  for (int i = 0; i < image_width(image) * image_height(image); ++i) sum += pixels[i];
  return sum;
}

/// Light of the nuclei alone, counts summed over the frame.
double light_of_nuclei(const Scene& scene, int frame) {
  Scene without = scene;
  without.nuclei.clear();
  return total(*SceneRenderer(scene).light(frame)) - total(*SceneRenderer(without).light(frame));
}

double content(const Scene& scene, double time_min) {
  const auto& life = scene.nuclei[0].lives[0];
  const double radius_px = life.radius_um(time_min) / scene.pixel_um;
  return life.brightness(time_min) * M_PI * radius_px * radius_px;
}

TEST(Render, AnIntactNucleusHasItsLightWhateverItsShape) {
  Scene scene = lone_nucleus();
  auto& nucleus = scene.nuclei[0];
  EXPECT_NEAR(light_of_nuclei(scene, 0) / content(scene, 0), 1, 2e-3);
  nucleus.elongation = 0.1;
  nucleus.lobes = 0.05;
  nucleus.texture = 0.2;
  EXPECT_NEAR(light_of_nuclei(scene, 0) / content(scene, 0), 1, 2e-3);
}

TEST(Render, ReleaseConservesLight) {
  const Scene scene = lone_nucleus();
  const double before = content(scene, 10);
  // Frames at 10.5, 11, 12, 14 and 19 min: near the disc, and spread far over the field.
  for (const int frame : {21, 22, 24, 28, 38})
    EXPECT_NEAR(light_of_nuclei(scene, frame) / before, 1, 0.01) << frame;
}

TEST(Render, WallsThrowReleasedLightBack) {
  Scene scene = lone_nucleus();
  auto& nucleus = scene.nuclei[0];
  nucleus.across_um = 375;  // 25 µm from the wall
  nucleus.lives[0].place_um = point_at(scene.tubes[0], nucleus.along_um, nucleus.across_um);
  const double before = content(scene, 10);
  for (const int frame : {21, 23, 30})
    EXPECT_NEAR(light_of_nuclei(scene, frame) / before, 1, 0.02) << frame;
}

TEST(Render, ReleasedLightSpreadsAsDiffusionFromADisc) {
  Scene scene = lone_nucleus();
  scene.optics.psf_um = 1e-2;
  Scene without = scene;
  without.nuclei.clear();
  const auto& life = scene.nuclei[0].lives[0];
  const double radius = life.radius_um(10);
  for (const int frame : {21, 22, 24, 30}) {
    const double elapsed = scene.times_min[static_cast<std::size_t>(frame)] - 10;
    const auto with = SceneRenderer(scene).light(frame);
    const auto dark = SceneRenderer(without).light(frame);
    double inside = 0;
    for (int y = 0; y < scene.height; ++y)
      for (int x = 0; x < scene.width; ++x) {
        const double distance =
            std::hypot(x * scene.pixel_um - life.place_um.x, y * scene.pixel_um - life.place_um.y);
        if (distance > radius) continue;
        const auto i = y * scene.width + x;
        inside += with->GetBufferPointer()[i] - dark->GetBufferPointer()[i];
      }
    const double tau = scene.optics.diffusion_um2_per_min * elapsed / (radius * radius);
    EXPECT_NEAR(inside / content(scene, 10) / share_left_in_disc(tau), 1, 0.03) << frame;
  }
}

TEST(Render, PermeabilisationLetsTheContentOutGradually) {
  Scene scene = lone_nucleus();
  scene.nuclei[0].lives[0].permeabilise_min = 2;
  scene.optics.diffusion_um2_per_min = 3e4;  // what is out is gone from the disc at once
  Scene without = scene;
  without.nuclei.clear();
  const SceneRenderer with_it(scene), without_it(without);
  const auto centre = [&](int frame) {
    const auto x = static_cast<int>(scene.nuclei[0].lives[0].place_um.x / scene.pixel_um);
    const auto y = static_cast<int>(scene.nuclei[0].lives[0].place_um.y / scene.pixel_um);
    const int i = y * scene.width + x;
    return with_it.light(frame)->GetBufferPointer()[i] -
           without_it.light(frame)->GetBufferPointer()[i];
  };
  const double at_entry = centre(20);
  EXPECT_NEAR(centre(24) / at_entry, std::exp(-1.0), 0.03);
  EXPECT_NEAR(centre(28) / at_entry, std::exp(-2.0), 0.03);
}

TEST(Render, DriftMovesTheContent) {
  Scene scene = lone_nucleus();
  Scene still = scene;
  scene.nuisances.drift_um.assign(scene.times_min.size(), Point{});
  scene.nuisances.drift_um[5] = {3 * scene.pixel_um, -2 * scene.pixel_um};
  const auto moved = SceneRenderer(scene).light(5);
  const auto kept = SceneRenderer(still).light(5);
  for (int y = 60; y < scene.height - 60; y += 7)
    for (int x = 60; x < scene.width - 60; x += 7)
      EXPECT_NEAR(moved->GetBufferPointer()[(y - 2) * scene.width + x + 3],
                  kept->GetBufferPointer()[y * scene.width + x], 0.05);
}

TEST(Render, BleachingAndUnevenLightScaleWhatIsSeen) {
  Scene scene = lone_nucleus();
  const auto even = SceneRenderer(scene).light(10);
  scene.nuisances.bleaching_per_min = 0.02;
  scene.nuisances.vignetting = 0.3;
  const auto uneven = SceneRenderer(scene).light(10);
  for (const int x : {100, 300, 600}) {
    const int y = scene.height / 3;
    const int i = y * scene.width + x;
    const double share = scene.evenness({x * scene.pixel_um, y * scene.pixel_um});
    EXPECT_NEAR(uneven->GetBufferPointer()[i],
                even->GetBufferPointer()[i] * share * std::exp(-0.02 * 5), 0.05);
  }
}

TEST(Render, SameBytesAtEachCallAndOnEveryThread) {
  const Scene scene = build_scene(small_recipe());
  const SceneRenderer renderer(scene);
  std::vector<ImagePointer> frames(4);
  std::vector<std::thread> threads;
  for (std::size_t i = 0; i < frames.size(); ++i)
    threads.emplace_back([&, i] { frames[i] = renderer.frame(60); });
  for (auto& thread : threads) thread.join();
  frames.push_back(render_frame(scene, 60));
  const auto size = static_cast<std::size_t>(scene.width) * static_cast<std::size_t>(scene.height);
  for (const auto& frame : frames)
    EXPECT_EQ(0, std::memcmp(frame->GetBufferPointer(), frames[0]->GetBufferPointer(),
                             size * sizeof(float)));
}

TEST(Render, RefusesAFrameThatIsNotThere) {
  EXPECT_THROW(render_frame(lone_nucleus(), 40), Problem);
}

}  // namespace
}  // namespace wavefount
