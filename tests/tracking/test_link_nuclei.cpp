#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

#include "point_film.h"
#include "wavefount/tracking/link_nuclei.h"

namespace wavefount {
namespace {

using testing::make_point_film;
using testing::PointFilmPlan;
using testing::score_links;

Sighting sighting(double x_px, double y_px, double brightness = 300, double radius_px = 8) {
  Sighting seen;
  seen.x_px = x_px;
  seen.y_px = y_px;
  seen.radius_px = radius_px;
  seen.area_px = std::numbers::pi * radius_px * radius_px;
  seen.brightness = brightness;
  seen.integrated = seen.area_px * brightness;
  seen.detection_sigma = 40;
  return seen;
}

/// A film made by hand: whole field, no drift, one pixel a µm, one frame a minute.
struct HandFilm {
  FilmDescription film;
  Observations observations;
  Tube tube;
  Drift drift;

  explicit HandFilm(int frames) {
    film.pixel_um = 1;
    film.frames = frames;
    for (int i = 0; i < frames; ++i) {
      film.times_min.push_back(i);
      observations.frames.emplace_back();
      observations.frames.back().frame = i;
      observations.frames.back().time_min = i;
      observations.frames.back().sharpness = 1;
    }
  }
  void see(int from, int to, const Sighting& seen) {
    for (int i = from; i < to; ++i) observations.frames[i].sightings.push_back(seen);
  }
  LinkedNuclei linked(const LinkSettings& settings = {}) const {
    return link_nuclei(film, observations, tube, drift, settings);
  }
};

TEST(LinkNuclei, NothingSeenGivesNoNuclei) {
  EXPECT_TRUE(HandFilm(0).linked().nuclei.nuclei.empty());
  EXPECT_TRUE(HandFilm(5).linked().nuclei.nuclei.empty());
}

TEST(LinkNuclei, OneFrameKeepsEverythingFromLeftToRight) {
  HandFilm made(1);
  for (const double x : {400.0, 100.0, 250.0, 251.0 + 40}) made.see(0, 1, sighting(x, 50));
  const auto nuclei = made.linked().nuclei.nuclei;
  ASSERT_EQ(nuclei.size(), 4u);
  for (std::size_t i = 0; i < nuclei.size(); ++i) {
    EXPECT_EQ(nuclei[i].id, static_cast<int>(i) + 1);
    ASSERT_EQ(nuclei[i].points.size(), 1u);
    EXPECT_TRUE(nuclei[i].points[0].found);
    if (i > 0) {
      EXPECT_GT(nuclei[i].points[0].x_um, nuclei[i - 1].points[0].x_um);
    }
  }
}

TEST(LinkNuclei, FilmOfFewFramesKeepsStaticNuclei) {
  HandFilm made(3);
  for (const double x : {100.0, 250.0, 400.0}) made.see(0, 3, sighting(x, 50));
  const auto linked = made.linked();
  ASSERT_EQ(linked.nuclei.nuclei.size(), 3u);
  EXPECT_EQ(linked.report.debris, 0);
  EXPECT_EQ(linked.nuclei.nuclei[0].points.size(), 3u);
  EXPECT_EQ(linked.nuclei.mitosis_min, 0);
}

TEST(LinkNuclei, BadNumbersAreLeftOut) {
  HandFilm made(3);
  made.see(0, 3, sighting(100, 50));
  made.see(0, 3, sighting(std::nan(""), 50));
  made.see(0, 3, sighting(300, 50, std::numeric_limits<double>::infinity()));
  auto none = sighting(500, 50);
  none.radius_px = 0;
  made.see(0, 3, none);
  EXPECT_EQ(made.linked().nuclei.nuclei.size(), 1u);
}

TEST(LinkNuclei, PlaceBetweenSightingsAndUnusableFrames) {
  HandFilm made(9);
  for (int i = 0; i < 9; ++i)
    if (i != 4) made.see(i, i + 1, sighting(100 + i, 50));
  made.observations.frames[4].usable = false;
  made.drift.x_px.assign(9, 2.0);
  made.drift.y_px.assign(9, -1.0);
  const auto nuclei = made.linked().nuclei.nuclei;
  ASSERT_EQ(nuclei.size(), 1u);
  ASSERT_EQ(nuclei[0].points.size(), 9u);
  const auto& point = nuclei[0].points[4];
  EXPECT_FALSE(point.found);
  EXPECT_TRUE(point.doubtful);
  EXPECT_EQ(point.sighting, -1);
  EXPECT_NEAR(point.x_um, 102, 0.3);
  EXPECT_NEAR(point.x_px, 104, 0.3);
  EXPECT_NEAR(point.y_px, 50, 0.3);
  EXPECT_FALSE(nuclei[0].points[3].doubtful);
  EXPECT_NEAR(nuclei[0].points[3].x_um, 101, 1e-9);
}

TEST(LinkNuclei, SightingFlagsAndLostFocusMakePointsDoubtful) {
  HandFilm made(20);
  auto border = sighting(100, 50);
  border.touches_border = true;
  made.see(0, 20, border);
  made.see(0, 20, sighting(300, 50));
  made.observations.frames[10].sharpness = 0.3;
  const auto nuclei = made.linked().nuclei.nuclei;
  ASSERT_EQ(nuclei.size(), 2u);
  EXPECT_TRUE(nuclei[0].points[3].doubtful);
  EXPECT_FALSE(nuclei[1].points[3].doubtful);
  EXPECT_TRUE(nuclei[1].points[10].doubtful);
}

/// Two cycles of three nuclei, lost for eight minutes; the middle one re-forms as it is told to.
HandFilm cycling(bool twins) {
  HandFilm made(80);
  const auto grow = [&](double x, int from, int to) {
    for (int i = from; i < to; ++i)
      made.see(i, i + 1, sighting(x, 50, 300 * (1 - std::exp(-(i - from + 1) / 8.0))));
  };
  for (const double x : {100.0, 500.0}) {
    grow(x, 0, 25);
    grow(x + 12, 33, 80);
  }
  grow(300, 0, 27);
  grow(312, 35, 80);
  if (twins) grow(280, 35, 80);
  return made;
}

TEST(LinkNuclei, MitosisKeepsTheNumberAndItsLength) {
  const auto linked = cycling(false).linked();
  ASSERT_EQ(linked.nuclei.nuclei.size(), 3u);
  EXPECT_EQ(linked.report.mitoses, 3);
  EXPECT_NEAR(linked.nuclei.mitosis_min, 8, 0.51);
  for (const auto& nucleus : linked.nuclei.nuclei) {
    EXPECT_EQ(nucleus.points.size(), 80u);
    EXPECT_EQ(nucleus.kinship, Kinship::none);
  }
}

TEST(LinkNuclei, DivisionOnlyWhereThePipelineSaysSo) {
  const auto made = cycling(true);
  const auto off = made.linked();
  ASSERT_EQ(off.nuclei.nuclei.size(), 4u);
  for (const auto& nucleus : off.nuclei.nuclei) EXPECT_NE(nucleus.kinship, Kinship::division);

  LinkSettings settings;
  settings.divisions = true;
  const auto on = made.linked(settings);
  ASSERT_EQ(on.nuclei.nuclei.size(), 4u);
  const auto daughter =
      std::find_if(on.nuclei.nuclei.begin(), on.nuclei.nuclei.end(),
                   [](const Nucleus& one) { return one.kinship == Kinship::division; });
  ASSERT_NE(daughter, on.nuclei.nuclei.end());
  ASSERT_EQ(daughter->parents.size(), 1u);
  const auto& mother = on.nuclei.nuclei[daughter->parents[0] - 1];
  EXPECT_EQ(mother.points.front().frame, 0);
  EXPECT_NEAR(mother.points.front().x_um, 300, 1);
  EXPECT_NEAR(daughter->points.front().x_um, 280, 1);
}

TEST(LinkNuclei, FusionNamesTheNucleusThatWasTakenUp) {
  HandFilm made(60);
  made.see(0, 60, sighting(500, 50));
  // Two nuclei touch and become one with the light of both.
  made.see(0, 30, sighting(100, 50, 300, 8));
  made.see(0, 30, sighting(115, 50, 200, 7));
  made.see(30, 60, sighting(103, 50, 340, 10));
  const auto nuclei = made.linked().nuclei.nuclei;
  ASSERT_EQ(nuclei.size(), 3u);
  EXPECT_EQ(nuclei[0].kinship, Kinship::fusion);
  EXPECT_EQ(nuclei[0].points.size(), 60u);
  EXPECT_EQ(nuclei[0].parents, (std::vector<int>{2}));
  EXPECT_TRUE(nuclei[1].parents.empty());
}

TEST(LinkNuclei, NucleusHiddenByATouchingOneKeepsItsNumber) {
  HandFilm made(60);
  made.see(0, 60, sighting(500, 50));
  made.see(0, 30, sighting(100, 50, 300, 8));
  made.see(0, 30, sighting(115, 50, 200, 7));
  made.see(30, 33, sighting(103, 50, 340, 10));
  made.see(33, 60, sighting(100, 50, 300, 8));
  made.see(33, 60, sighting(115, 50, 200, 7));
  const auto nuclei = made.linked().nuclei.nuclei;
  ASSERT_EQ(nuclei.size(), 3u);
  for (const auto& nucleus : nuclei) {
    EXPECT_EQ(nucleus.points.size(), 60u);
    EXPECT_TRUE(nucleus.parents.empty());
  }
}

TEST(LinkNuclei, FragmentThatWasNeverWholeBefore) {
  HandFilm made(60);
  made.see(0, 60, sighting(500, 50));
  made.see(0, 30, sighting(103, 50, 340, 10));
  made.see(30, 60, sighting(100, 50, 300, 8));
  made.see(30, 60, sighting(116, 50, 250, 7));
  const auto nuclei = made.linked().nuclei.nuclei;
  ASSERT_EQ(nuclei.size(), 3u);
  EXPECT_EQ(nuclei[1].kinship, Kinship::fragment);
  EXPECT_EQ(nuclei[1].parents, (std::vector<int>{1}));
}

TEST(LinkNuclei, DebrisIsKeptOnRequestAndInShortFilms) {
  PointFilmPlan plan;
  plan.seed = 21;
  plan.debris = 3;
  const auto made = make_point_film(plan);
  LinkSettings keep;
  keep.drop_debris = false;
  const auto kept = link_nuclei(made.film, made.observations, made.tube, made.drift, keep);
  EXPECT_EQ(score_links(made, kept.nuclei).debris_kept, 3);
  plan.frames = 30;
  const auto brief = make_point_film(plan);
  const auto linked = link_nuclei(brief.film, brief.observations, brief.tube, brief.drift);
  EXPECT_EQ(linked.report.debris, 0);
}

TEST(LinkNuclei, EmptyTubeHoldsNoNucleiButOnesThatChangeStay) {
  HandFilm made(100);
  for (const double x : {100.0, 300.0, 480.0}) made.see(0, 100, sighting(x, 50));
  for (int i = 0; i < 100; ++i)
    made.see(i, i + 1, sighting(700, 50, 300 * (1 - std::exp(-(i + 10) / 30.0))));
  const auto linked = made.linked();
  EXPECT_EQ(linked.report.debris, 3);
  ASSERT_EQ(linked.nuclei.nuclei.size(), 1u);
  EXPECT_NEAR(linked.nuclei.nuclei[0].points[0].x_um, 700, 1);
}

TEST(LinkNuclei, FaintFlickerIsNoNucleusButOneJustFormedIs) {
  auto made = cycling(false);
  for (int i = 0; i < 80; i += i % 3 == 0 ? 1 : 2) made.see(i, i + 1, sighting(700, 50, 20, 20));
  for (int i = 72; i < 80; ++i) made.see(i, i + 1, sighting(900, 50, 6.0 * (i - 71)));
  const auto nuclei = made.linked().nuclei.nuclei;
  ASSERT_EQ(nuclei.size(), 4u);
  EXPECT_NEAR(nuclei[3].points[0].x_um, 900, 1);
}

TEST(LinkNuclei, OrderOfSightingsChangesNothing) {
  PointFilmPlan plan;
  plan.seed = 4;
  plan.frames = 150;
  auto made = make_point_film(plan);
  const auto first = link_nuclei(made.film, made.observations, made.tube, made.drift);
  for (auto& frame : made.observations.frames)
    std::reverse(frame.sightings.begin(), frame.sightings.end());
  const auto second = link_nuclei(made.film, made.observations, made.tube, made.drift);
  ASSERT_EQ(first.nuclei.nuclei.size(), second.nuclei.nuclei.size());
  for (std::size_t i = 0; i < first.nuclei.nuclei.size(); ++i) {
    const auto& a = first.nuclei.nuclei[i].points;
    const auto& b = second.nuclei.nuclei[i].points;
    ASSERT_EQ(a.size(), b.size());
    for (std::size_t j = 0; j < a.size(); ++j) {
      EXPECT_EQ(a[j].found, b[j].found);
      EXPECT_NEAR(a[j].x_um, b[j].x_um, 1e-6);
    }
  }
}

TEST(LinkNuclei, TimesAndPlacesStayOrderedAndFinite) {
  PointFilmPlan plan;
  plan.seed = 9;
  plan.dropped_share = 0.2;
  plan.irregular = true;
  plan.jumps = 4;
  const auto made = make_point_film(plan);
  const auto linked = link_nuclei(made.film, made.observations, made.tube, made.drift);
  for (const auto& nucleus : linked.nuclei.nuclei) {
    EXPECT_TRUE(nucleus.points.front().found);
    EXPECT_TRUE(nucleus.points.back().found);
    for (std::size_t i = 0; i < nucleus.points.size(); ++i) {
      const auto& point = nucleus.points[i];
      EXPECT_TRUE(std::isfinite(point.x_px) && std::isfinite(point.y_um));
      if (i > 0) {
        EXPECT_EQ(point.frame, nucleus.points[i - 1].frame + 1);
      }
    }
  }
}

}  // namespace
}  // namespace wavefount
