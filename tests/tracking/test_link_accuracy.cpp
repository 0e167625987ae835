#include <gtest/gtest.h>

#include <chrono>
#include <cstdio>

#include "point_film.h"
#include "wavefount/tracking/link_nuclei.h"

namespace wavefount::testing {
namespace {

LinkScore run(PointFilmPlan plan, int seeds, const char* name) {
  LinkScore total;
  double mitosis_error = 0;
  for (int seed = 1; seed <= seeds; ++seed) {
    plan.seed = static_cast<std::uint32_t>(seed * 7919);
    const auto made = make_point_film(plan);
    const auto linked = link_nuclei(made.film, made.observations, made.tube, made.drift);
    total += score_links(made, linked.nuclei);
    mitosis_error += (linked.nuclei.mitosis_min - plan.mitosis_min) / seeds;
  }
  std::printf(
      "%-22s links %.5f  identity %.5f of %d (%d swapped)  nuclei %d, invented %d, debris %d  "
      "lost %.4f  false kept %d  mitosis %+.2f min\n",
      name, total.link_share(), total.mitosis_share(), total.mitoses, total.mitoses_swapped,
      total.nuclei, total.nuclei_invented, total.debris_kept,
      double(total.sightings_lost) / total.sightings, total.false_kept, mitosis_error);
  return total;
}

void expect_good(const LinkScore& score) {
  EXPECT_GE(score.link_share(), 0.999);
  EXPECT_GE(score.mitosis_share(), 0.99);
  EXPECT_LE(score.nuclei_invented, 0.02 * score.nuclei);
  EXPECT_LE(score.sightings_lost, 0.005 * score.sightings);
  // Two in a film; one may lie within a nucleus' outline, where a missed sighting swaps them.
  EXPECT_LE(score.debris_kept, 1);
}

TEST(LinkAccuracy, OrdinaryFilm) {
  expect_good(run({}, 10, "ordinary"));
}

TEST(LinkAccuracy, LongIntervals) {
  PointFilmPlan plan;
  plan.interval_min = 2;
  plan.frames = 180;
  plan.interphase_min = 18;
  plan.mitosis_min = 6;
  expect_good(run(plan, 10, "2 min frames"));
}

TEST(LinkAccuracy, ShortIntervals) {
  PointFilmPlan plan;
  plan.interval_min = 0.2;
  plan.frames = 1000;
  plan.length_um = 1200;
  expect_good(run(plan, 4, "0.2 min frames"));
}

TEST(LinkAccuracy, FarReformation) {
  PointFilmPlan plan;
  plan.displacement_um = 16;
  plan.far_share = 0.08;
  plan.mitosis_min = 16;
  expect_good(run(plan, 10, "far re-formation"));
}

TEST(LinkAccuracy, AllTogether) {
  PointFilmPlan plan;
  plan.slowness_min_per_um = 0;
  plan.displacement_um = 14;
  expect_good(run(plan, 10, "all together"));
}

TEST(LinkAccuracy, SlowWaveSeveralPhases) {
  PointFilmPlan plan;
  plan.slowness_min_per_um = 0.12;
  plan.jitter_min = 2;
  expect_good(run(plan, 10, "slow wave"));
}

TEST(LinkAccuracy, FlowDroppedFramesIrregularStamps) {
  PointFilmPlan plan;
  plan.flow_um_per_min = 1;
  plan.dropped_share = 0.1;
  plan.irregular = true;
  expect_good(run(plan, 10, "flow, dropped frames"));
}

TEST(LinkAccuracy, JumpsOfTheStage) {
  PointFilmPlan plan;
  plan.jumps = 3;
  plan.jump_rest_um = 25;
  plan.hidden_jumps = 2;
  expect_good(run(plan, 10, "jumps"));
}

TEST(LinkAccuracy, ManyDeathsMissesAndFalseAlarms) {
  PointFilmPlan plan;
  plan.death_share = 0.08;
  plan.newborn = 6;
  plan.missed_share = 0.1;
  plan.false_share = 0.05;
  plan.debris = 5;
  const auto score = run(plan, 10, "deaths, misses");
  EXPECT_GE(score.link_share(), 0.998);
  EXPECT_GE(score.mitosis_share(), 0.985);
  EXPECT_LE(score.nuclei_invented, 0.02 * score.nuclei);
  EXPECT_EQ(score.debris_kept, 0);
}

TEST(LinkAccuracy, ThinTubeFewNuclei) {
  PointFilmPlan plan;
  plan.width_um = 100;
  plan.length_um = 700;
  plan.spacing_um = 180;
  expect_good(run(plan, 20, "thin tube"));
}

TEST(LinkAccuracy, DenseFastEmbryo) {
  PointFilmPlan plan;
  plan.length_um = 300;
  plan.width_um = 120;
  plan.spacing_um = 26;
  plan.interval_min = 0.25;
  plan.frames = 240;
  plan.interphase_min = 9;
  plan.mitosis_min = 4;
  plan.slowness_min_per_um = 0.016;
  plan.jitter_min = 0.2;
  plan.displacement_um = 2;
  plan.wander_um = 0.3;
  plan.flow_um_per_min = 0.2;
  plan.debris = 0;
  expect_good(run(plan, 5, "dense embryo"));
}

TEST(LinkAccuracy, FewFramesAnInterphase) {
  PointFilmPlan plan;
  plan.interval_min = 4;
  plan.frames = 90;
  plan.interphase_min = 14;
  plan.mitosis_min = 8;
  const auto score = run(plan, 10, "4 min frames");
  EXPECT_GE(score.link_share(), 0.99);
  EXPECT_GE(score.mitosis_share(), 0.98);
  EXPECT_LE(score.sightings_lost, 0.02 * score.sightings);
}

TEST(LinkAccuracy, LongFilmLinksInSeconds) {
  PointFilmPlan plan;
  plan.frames = 2000;
  plan.interval_min = 0.5;
  const auto made = make_point_film(plan);
  const auto start = std::chrono::steady_clock::now();
  const auto linked = link_nuclei(made.film, made.observations, made.tube, made.drift);
  const std::chrono::duration<double> took = std::chrono::steady_clock::now() - start;
  std::printf("2000 frames, %zu nuclei: %.2f s\n", linked.nuclei.nuclei.size(), took.count());
  EXPECT_LT(took.count(), 10);
}

}  // namespace
}  // namespace wavefount::testing
