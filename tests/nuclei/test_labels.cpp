#include <gtest/gtest.h>
#include <unistd.h>

#include <algorithm>
#include <filesystem>

#include "wavefount/nuclei/labels.h"

namespace wavefount::nuclei {
namespace {

struct Film {
  FilmDescription film;
  Observations observations;
  Nuclei nuclei;

  explicit Film(int id) {
    film.width = 20;
    film.height = 10;
    film.frames = 2;
    observations.frames.resize(2);
    Sighting sighting;
    sighting.runs = {{3, 5, 8}, {4, 18, 30}, {40, 0, 5}};
    observations.frames[1].sightings = {Sighting{}, sighting};
    Nucleus nucleus;
    nucleus.id = id;
    TracePoint point;
    point.frame = 1;
    point.found = true;
    point.sighting = 1;
    nucleus.points = {point};
    nuclei.nuclei = {nucleus};
  }
};

TEST(Labels, ANucleusIsItsNumberPlusOneInsideItsOutline) {
  const Film made(6);
  const LabelPainter painter(made.film, made.observations, made.nuclei);
  const auto empty = painter.page<std::uint16_t>(0);
  EXPECT_EQ(std::count(empty.begin(), empty.end(), 0), 200);
  const auto page = painter.page<std::uint16_t>(1);
  EXPECT_EQ(page[3 * 20 + 5], 7);
  EXPECT_EQ(page[3 * 20 + 8], 0);
  EXPECT_EQ(page[4 * 20 + 19], 7);  // a run that leaves the image is cut
  EXPECT_EQ(std::count(page.begin(), page.end(), 7), 5);
}

TEST(Labels, SixteenBitUntilALabelNeedsMore) {
  const Film few(1);
  const Film many(70000);
  const auto file = std::filesystem::temp_directory_path() /
                    ("wavefount-labels-" + std::to_string(::getpid()) + ".tif");
  const LabelPainter small(few.film, few.observations, few.nuclei);
  write_labels(file, small, 2, 20, 10);
  EXPECT_GT(std::filesystem::file_size(file), 100U);
  const LabelPainter large(many.film, many.observations, many.nuclei);
  EXPECT_EQ(large.highest_label(), 70001U);
  EXPECT_EQ(large.page<std::uint32_t>(1)[3 * 20 + 5], 70001U);
  write_labels(file, large, 2, 20, 10);
  std::filesystem::remove(file);
}

}  // namespace
}  // namespace wavefount::nuclei
