#include <gtest/gtest.h>

#include <fstream>
#include <iterator>
#include <map>
#include <set>

#include "wavefount/acquisition/csv_reader.h"
#include "wavefount/core/problem.h"
#include "wavefount/synthetic/demo.h"

namespace wavefount {
namespace {

namespace fs = std::filesystem;

class Demo : public testing::Test {
 protected:
  void SetUp() override {
    folder_ =
        fs::path(testing::TempDir()) /
        (std::string("demo-") + testing::UnitTest::GetInstance()->current_test_info()->name());
    fs::remove_all(folder_);
  }
  void TearDown() override { fs::remove_all(folder_); }

  static DemoOptions small_options() {
    DemoOptions options;
    options.frames = 3;
    options.view_um = 400;
    options.pixel_um = 2.6;
    return options;
  }

  static std::map<std::string, std::string> bytes_in(const fs::path& folder) {
    std::map<std::string, std::string> files;
    for (const auto& entry : fs::recursive_directory_iterator(folder)) {
      if (!entry.is_regular_file()) continue;
      std::ifstream in(entry.path(), std::ios::binary);
      files[fs::relative(entry.path(), folder).string()] =
          std::string(std::istreambuf_iterator<char>(in), {});
    }
    return files;
  }

  fs::path folder_;
};

TEST_F(Demo, WritesFilmsTruthAndASheetThatNamesEveryFilm) {
  write_demo(folder_, small_options());
  const auto sheet = read_csv(folder_ / "films" / "acquisitions.csv");
  ASSERT_EQ(sheet.rows.size(), demo_scenarios(1).size());
  const auto name = static_cast<std::size_t>(sheet.column("acquisition"));
  for (const auto& row : sheet.rows) {
    EXPECT_TRUE(fs::exists(folder_ / "truth" / row[name] / "entries.csv")) << row[name];
    const auto film = folder_ / "films" / row[name];
    EXPECT_TRUE(fs::exists(film) || fs::exists(film.string() + ".tif") ||
                fs::exists(film.string() + ".ome.tif"))
        << row[name];
  }
}

TEST_F(Demo, SameBytesAtAnyNumberOfThreads) {
  auto options = small_options();
  options.only = {"noisy", "empty"};
  options.labels = true;
  options.threads = 1;
  write_demo(folder_, options);
  options.threads = 5;
  write_demo(folder_ / "again", options);
  auto first = bytes_in(folder_);
  const auto second = bytes_in(folder_ / "again");
  std::erase_if(first, [](const auto& file) { return file.first.starts_with("again"); });
  ASSERT_GT(first.size(), 8u);
  EXPECT_EQ(first, second);
}

TEST_F(Demo, MoreThanTheScenariosGetNamesAndSeedsOfTheirOwn) {
  DemoOptions options;
  options.count = 29;
  const auto recipes = demo_recipes(options);
  ASSERT_EQ(recipes.size(), 29u);
  std::set<std::string> names;
  std::set<std::uint64_t> seeds;
  for (const auto& recipe : recipes) {
    names.insert(recipe.name);
    seeds.insert(recipe.seed);
  }
  EXPECT_EQ(names.size(), 29u);
  EXPECT_EQ(seeds.size(), 29u);
}

TEST_F(Demo, OptionsReachTheRecipes) {
  DemoOptions options;
  options.tube_width_um = 321;
  options.frames = 7;
  options.interval_min = 0.5;
  options.noise = 2;
  const auto plain = demo_recipes({});
  const auto recipes = demo_recipes(options);
  for (std::size_t i = 0; i < recipes.size(); ++i) {
    EXPECT_EQ(recipes[i].tube_width_um, 321);
    EXPECT_EQ(recipes[i].frames, 7);
    EXPECT_EQ(recipes[i].interval_min, 0.5);
    EXPECT_DOUBLE_EQ(recipes[i].camera.gain_electrons_per_count,
                     plain[i].camera.gain_electrons_per_count / 4);
  }
}

TEST_F(Demo, RefusesAFolderInUseAndOptionsOutsideTheirRanges) {
  fs::create_directories(folder_ / "something");
  EXPECT_THROW(write_demo(folder_, small_options()), Problem);
  for (const auto& spoil : std::vector<void (*)(DemoOptions&)>{
           [](DemoOptions& o) { o.count = -1; }, [](DemoOptions& o) { o.noise = 0; },
           [](DemoOptions& o) { o.frames = 0; }, [](DemoOptions& o) { o.tube_width_um = 1; },
           [](DemoOptions& o) { o.only = {"no such scenario"}; }}) {
    DemoOptions options;
    spoil(options);
    EXPECT_THROW(write_demo(folder_ / "new", options), Problem);
    EXPECT_FALSE(fs::exists(folder_ / "new"));
  }
}

}  // namespace
}  // namespace wavefount
