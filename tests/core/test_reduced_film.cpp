#include <gtest/gtest.h>

#include <filesystem>

#include "wavefount/core/problem.h"
#include "wavefount/core/reduced_film.h"

namespace wavefount {
namespace {

TEST(ReducedFilm, KeepsFramesWithinHalfAStep) {
  const auto file = std::filesystem::path(testing::TempDir()) / "reduced_film_test";
  {
    ReducedFilm film(file, 3, 2, 10, 20, 7, 5, 100, 4200);
    auto image = make_image(7, 5);
    for (int i = 0; i < 35; ++i)
      image->GetBufferPointer()[i] = 100.3F + 117.7F * static_cast<float>(i);
    film.write(2, *image);
    const auto read = film.read(2);
    const double half_step = 0.5 * 4100 / 65535;
    for (int i = 0; i < 35; ++i)
      EXPECT_NEAR(read->GetBufferPointer()[i], image->GetBufferPointer()[i], half_step * 1.01);
    EXPECT_EQ(film.read(1)->GetBufferPointer()[3], 100);
    EXPECT_TRUE(std::filesystem::exists(file));
  }
  EXPECT_FALSE(std::filesystem::exists(file)) << "the work file stays behind";
}

TEST(ReducedFilm, SaysWhereItCannotBeMade) {
  EXPECT_THROW(ReducedFilm("/no-such-folder/file", 1, 1, 0, 0, 1, 1, 0, 1), Problem);
}

TEST(ReducedFilm, SaysThatTheDiskIsFull) {
  if (!std::filesystem::exists("/dev/full")) GTEST_SKIP() << "no /dev/full here";
  const auto link = std::filesystem::path(testing::TempDir()) / "reduced_film_full";
  std::filesystem::remove(link);
  std::filesystem::create_symlink("/dev/full", link);
  ReducedFilm film(link, 1, 1, 0, 0, 4, 4, 0, 1);
  auto image = make_image(4, 4);
  image->FillBuffer(0.5F);
  EXPECT_THROW(film.write(0, *image), Problem);
}

}  // namespace
}  // namespace wavefount
