#include <gtest/gtest.h>

#include <cctype>
#include <cmath>

#include "wavefount/core/robust.h"
#include "wavefount/synthetic/demo.h"
#include "wavefount/synthetic/render.h"
#include "wavefount/tube/find_tubes.h"
#include "wavefount/tube/scan_ahead.h"

namespace wavefount::tube {
namespace {

/// A scene of the demo as an opened film.
class DemoFilm : public FrameSource {
 public:
  explicit DemoFilm(const Scene& scene) : renderer_(scene) {
    description_.name = scene.name;
    description_.width = scene.width;
    description_.height = scene.height;
    description_.frames = scene.frames();
    description_.channels = {"reporter"};
    description_.bit_depth = scene.camera.bit_depth;
    description_.pixel_um = scene.pixel_um;
    description_.times_min = scene.times_min;
  }
  const FilmDescription& description() const override { return description_; }
  std::unique_ptr<FrameReader> reader() const override {
    class Reader : public FrameReader {
     public:
      explicit Reader(const SceneRenderer& renderer) : renderer_(renderer) {}
      ImagePointer read(int frame, int, int) override { return renderer_.frame(frame); }

     private:
      const SceneRenderer& renderer_;
    };
    return std::make_unique<Reader>(renderer_);
  }

 private:
  SceneRenderer renderer_;
  FilmDescription description_;
};

class DemoScenes : public ::testing::TestWithParam<SceneRecipe> {};

TEST_P(DemoScenes, TubesAndKeyframes) {
  auto recipe = GetParam();
  recipe.frames = std::min(recipe.frames, 60);
  const auto scene = build_scene(recipe);
  const DemoFilm film(scene);
  Messages messages;
  const auto scan = scan_ahead(film, {}, messages);
  EXPECT_NEAR(scan.camera.gain_electrons_per_count, scene.camera.gain_electrons_per_count,
              0.1 * scene.camera.gain_electrons_per_count);
  const auto tubes = find_tubes(film.description(), scan.prescan, {}, messages);
  ASSERT_EQ(tubes.tubes.size(), scene.tubes.size());
  const double two_px = 2 * scene.pixel_um * scan.prescan.factor;
  for (std::size_t i = 0; i < tubes.tubes.size(); ++i) {
    const auto& found = tubes.tubes[i];
    const auto& truth = scene.tubes[i];
    EXPECT_NEAR(found.width_um, truth.width_um, 0.02 * truth.width_um);
    EXPECT_NEAR(found.axis_um.front().x, truth.axis_um.front().x, two_px);
    EXPECT_NEAR(found.axis_um.front().y, truth.axis_um.front().y, two_px);
    EXPECT_NEAR(found.axis_um.back().x, truth.axis_um.back().x, two_px);
    EXPECT_NEAR(found.axis_um.back().y, truth.axis_um.back().y, two_px);
  }
  // Along a tube with both ends out of view nothing that stands still tells of the stage.
  const bool open =
      scene.tubes[0].left_end == Boundary::open && scene.tubes[0].right_end == Boundary::open;
  std::vector<double> errors;
  for (std::size_t k = 0; k < scan.prescan.frames.size(); ++k) {
    const auto drift = scene.drift_um(scan.prescan.frames[k]);
    errors.push_back(std::hypot(scan.prescan.shift_x_px[k] - drift.x / scene.pixel_um,
                                scan.prescan.shift_y_px[k] - drift.y / scene.pixel_um));
  }
  EXPECT_LT(median(errors), open ? 5 : 0.3);
}

INSTANTIATE_TEST_SUITE_P(All, DemoScenes, ::testing::ValuesIn(demo_scenarios(7)),
                         [](const auto& one) {
                           auto name = one.param.name;
                           std::erase_if(name, [](char c) { return !std::isalnum(c); });
                           return name;
                         });

}  // namespace
}  // namespace wavefount::tube
