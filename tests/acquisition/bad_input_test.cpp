#include <cstring>
#include <fstream>
#include <iterator>
#include <random>

#include "film_folder.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

using testing::any_contains;

class BadInput : public testing::FilmFolder {
 protected:
  std::string bytes_of(const std::string& name) const {
    std::ifstream stream(path(name), std::ios::binary);
    return {std::istreambuf_iterator<char>(stream), {}};
  }

  /// Every byte at which one of the film's directories starts (classic, little-endian).
  static std::vector<std::size_t> directories(const std::string& bytes) {
    std::vector<std::size_t> found;
    for (std::size_t at = number<std::uint32_t>(bytes, 4); at != 0;) {
      found.push_back(at);
      at = number<std::uint32_t>(bytes, link_of(bytes, at));
    }
    return found;
  }
  static std::size_t link_of(const std::string& bytes, std::size_t directory) {
    return directory + 2 + 12 * std::size_t{number<std::uint16_t>(bytes, directory)};
  }
  template <class Number>
  static Number number(const std::string& bytes, std::size_t at) {
    Number value{};
    std::memcpy(&value, bytes.data() + at, sizeof(value));
    return value;
  }
  template <class Number>
  static void set_number(std::string& bytes, std::size_t at, Number value) {
    std::memcpy(bytes.data() + at, &value, sizeof(value));
  }
  /// Where the value of a tag lies in a directory.
  static std::size_t value_of(const std::string& bytes, std::size_t directory, std::uint16_t tag) {
    const std::size_t entries = number<std::uint16_t>(bytes, directory);
    for (std::size_t i = 0; i < entries; ++i) {
      const std::size_t entry = directory + 2 + 12 * i;
      if (number<std::uint16_t>(bytes, entry) == tag) return entry + 8;
    }
    ADD_FAILURE() << "no tag " << tag;
    return directory;
  }
};

TEST_F(BadInput, AnEmptyFileSaysSo) {
  write_text("a.tif", "");
  write_text("frames/a.tif", "");
  EXPECT_NE(complaint_on_opening("a").find("zero bytes"), std::string::npos);
  EXPECT_NE(complaint_on_opening("frames").find("zero bytes"), std::string::npos);
}

TEST_F(BadInput, OtherFilesAreNoTiff) {
  write_text("a.tif", "\x89PNG\r\n\x1a\n and more");
  EXPECT_NE(complaint_on_opening("a").find("not a TIFF"), std::string::npos);
  write_text("b.tif", "I");
  EXPECT_NE(complaint_on_opening("b").find("not a TIFF"), std::string::npos);
  std::mt19937 random(7);
  std::string noise(5000, ' ');
  for (char& byte : noise) byte = static_cast<char>(random() & 255U);
  write_text("c.tif", noise);
  EXPECT_NE(complaint_on_opening("c"), "");
  write_text("d.tif", std::string("II*\0", 4) + noise);
  EXPECT_NE(complaint_on_opening("d"), "");
}

TEST_F(BadInput, ATruncatedFilmIsUsedUpToTheBreak) {
  for (const auto compression : {TiffCompression::none, TiffCompression::deflate}) {
    TiffLayout layout;
    layout.compression = compression;
    write_film("a.tif", 10, layout);
    write_sidecar("a");
    const auto whole = bytes_of("a.tif");
    const auto places = directories(whole);
    write_text("a.tif", whole.substr(0, places[6] + 5));
    const auto film = open("a");
    EXPECT_EQ(film->description().frames, 6);
    EXPECT_EQ(film->description().times_min.size(), 6U);
    EXPECT_TRUE(any_contains(film->description().notes, "cut short"));
    expect_page(*film->reader()->read(5, 0, 0), 5);
    write_text("a.tif", whole.substr(0, 100));
    EXPECT_NE(complaint_on_opening("a").find("cut short"), std::string::npos);
  }
}

TEST_F(BadInput, ATruncatedOmeFilmIsUsedUpToTheBreak) {
  write_ome_film("a.ome.tif", 10);
  const auto whole = bytes_of("a.ome.tif");
  write_text("a.ome.tif", whole.substr(0, directories(whole)[4] - 3));
  const auto film = open("a");
  EXPECT_EQ(film->description().frames, 4);
  expect_page(*film->reader()->read(3, 0, 0), 3);
}

TEST_F(BadInput, MoreTimesThanFramesAreFineInATruncatedFilm) {
  write_film("a.tif", 4);
  write_text("a.yaml", "pixel_size_um: 1\ntimes_min: [0, 1, 3, 7]\n");
  const auto whole = bytes_of("a.tif");
  write_text("a.tif", whole.substr(0, directories(whole)[3]));
  EXPECT_EQ(open("a")->description().times_min, (std::vector<double>{0, 1, 3}));
}

TEST_F(BadInput, PixelsBeyondTheEndOfTheFileCutTheFilm) {
  for (const auto compression : {TiffCompression::none, TiffCompression::lzw}) {
    TiffLayout layout;
    layout.compression = compression;
    write_film("a.tif", 5, layout);
    write_sidecar("a");
    auto bytes = bytes_of("a.tif");
    constexpr std::uint16_t strip_offsets = 273;
    for (const std::size_t page : {3U, 4U}) {
      const auto at = value_of(bytes, directories(bytes)[page], strip_offsets);
      set_number(bytes, at, static_cast<std::uint32_t>(bytes.size() - 10));
    }
    write_text("a.tif", bytes);
    const auto film = open("a");
    EXPECT_EQ(film->description().frames, 3);
    EXPECT_TRUE(any_contains(film->description().notes, "beyond the end"));
  }
}

TEST_F(BadInput, PixelsThatDoNotDecodeAtTheEndCutTheFilm) {
  TiffLayout layout;
  layout.compression = TiffCompression::deflate;
  write_film("a.tif", 5, layout);
  write_sidecar("a");
  auto bytes = bytes_of("a.tif");
  const auto places = directories(bytes);
  const auto first = number<std::uint32_t>(bytes, value_of(bytes, places[4], 273));
  std::fill(bytes.begin() + first, bytes.begin() + first + 300, '\x55');
  write_text("a.tif", bytes);
  const auto film = open("a");
  EXPECT_EQ(film->description().frames, 4);
  EXPECT_TRUE(any_contains(film->description().notes, "damaged"));
}

TEST_F(BadInput, ADamagedFrameAmidTheFilmIsLeftOut) {
  write_film("a.tif", 5);
  write_sidecar("a");
  auto bytes = bytes_of("a.tif");
  const auto at = value_of(bytes, directories(bytes)[2], 273);
  set_number(bytes, at, std::uint32_t{0x7FFFFFFF});
  write_text("a.tif", bytes);
  const auto film = open("a");
  EXPECT_EQ(film->description().frames, 5);
  EXPECT_EQ(film->description().overrides.exclude_frames, std::vector<int>{2});
  auto reader = film->reader();
  EXPECT_NE(testing::complaint([&] { reader->read(2, 0, 0); }).find("Frame 2"), std::string::npos);
  expect_page(*reader->read(3, 0, 0), 3);
}

TEST_F(BadInput, DirectoriesInACircleEndTheFilm) {
  write_film("a.tif", 4);
  write_sidecar("a");
  auto bytes = bytes_of("a.tif");
  const auto places = directories(bytes);
  set_number(bytes, link_of(bytes, places[3]), static_cast<std::uint32_t>(places[1]));
  write_text("a.tif", bytes);
  const auto film = open("a");
  EXPECT_EQ(film->description().frames, 4);
  EXPECT_TRUE(any_contains(film->description().notes, "circle"));
}

TEST_F(BadInput, AbsurdSizesAreRefusedBeforeMemoryIsTaken) {
  write_film("a.tif", 1);
  write_sidecar("a");
  auto bytes = bytes_of("a.tif");
  const auto directory = directories(bytes)[0];
  constexpr std::uint16_t width_tag = 256, height_tag = 257;
  for (const std::uint32_t side : {200'000U, 0xFFFFFFF0U}) {
    for (const std::uint16_t tag : {width_tag, height_tag}) {
      const auto at = value_of(bytes, directory, tag);
      set_number(bytes, at - 6, std::uint16_t{4});
      set_number(bytes, at, side);
    }
    write_text("a.tif", bytes);
    const auto complaint = complaint_on_opening("a");
    EXPECT_NE(complaint.find(side == 200'000U ? "absurd" : "damaged"), std::string::npos)
        << complaint;
  }
  set_number(bytes, directory, std::uint16_t{65000});
  write_text("a.tif", bytes);
  EXPECT_NE(complaint_on_opening("a"), "");
}

TEST_F(BadInput, FramesOfAnotherSizeAreNamed) {
  const auto write_pages = [&](const std::vector<int>& heights) {
    TiffWriter writer(path("a.tif"), {});
    for (const int height : heights) write_page(writer, PixelFormat::unsigned16, 0, height);
    writer.commit();
  };
  write_sidecar("a");
  write_pages({42, 42, 30, 42});
  EXPECT_NE(complaint_on_opening("a").find("Frame 2"), std::string::npos);
  EXPECT_NE(complaint_on_opening("a").find("75 × 30"), std::string::npos);
  write_pages({42, 42, 42, 30});
  EXPECT_EQ(open("a")->description().frames, 3);
  write_pages({42, 30, 30, 30});
  EXPECT_NE(complaint_on_opening("a").find("Frame 1"), std::string::npos);
}

TEST_F(BadInput, AFileOfSeveralPagesAmidAFolderOfFramesIsNamed) {
  write_film("frames/t1.tif", 1);
  write_film("frames/t2.tif", 3);
  write_sidecar("frames");
  EXPECT_NE(complaint_on_opening("frames").find("t2.tif"), std::string::npos);
}

/// Opens and reads whatever can be read; anything but a Problem fails the test.
void read_all(const std::filesystem::path& folder) {
  try {
    for (const auto& found : list_films(folder).films) {
      const auto film = open_film(found, {});
      auto reader = film->reader();
      for (int frame = 0; frame < std::min(film->description().frames, 4); ++frame) {
        reader->read(frame, 0, 0);
      }
    }
  } catch (const Problem& problem) {
    EXPECT_GT(std::strlen(problem.what()), 10U);
  }
}

class Flips : public BadInput,
              public ::testing::WithParamInterface<std::tuple<TiffCompression, int, bool>> {};

TEST_P(Flips, OfBytesNeverEndInMoreThanAProblem) {
  folder_ = std::filesystem::path(::testing::TempDir()) /
            ("wavefount-flips-" + std::to_string(::getpid()));
  std::filesystem::remove_all(folder_);
  std::filesystem::create_directories(folder_);
  TiffLayout layout;
  std::tie(layout.compression, layout.tile_px, layout.big_tiff) = GetParam();
  layout.rows_per_strip = 8;
  write_ome_film("a.ome.tif", 3, layout);
  const auto whole = bytes_of("a.ome.tif");
  std::mt19937 random(20240607);
  for (int round = 0; round < 150; ++round) {
    auto bytes = whole;
    const int flips = 1 + static_cast<int>(random() % 12);
    for (int i = 0; i < flips; ++i) {
      // Half of the flips hit directories and header, which lie apart from the pixels.
      const auto places = std::size_t{random()} % bytes.size();
      const bool tail = (random() & 1U) != 0;
      const auto at = tail ? bytes.size() - 1 - places % 400 : places;
      bytes[at] = static_cast<char>(random() & 255U);
    }
    if (round % 10 == 0) bytes.resize(random() % bytes.size());
    write_text("a.ome.tif", bytes);
    read_all(folder_);
  }
}

INSTANTIATE_TEST_SUITE_P(
    Some, Flips,
    ::testing::Combine(::testing::Values(TiffCompression::none, TiffCompression::lzw,
                                         TiffCompression::deflate, TiffCompression::zstd),
                       ::testing::Values(0, 16), ::testing::Bool()));

TEST_F(BadInput, FlippedBytesInSidecarAndSheetNeverEndInMoreThanAProblem) {
  write_film("a.tif", 2);
  const std::string sidecar =
      "pixel_size_um: 0.5\ntimes_min: [0, 1]\noutline: [[0, 0], [3, 0], [3, 2]]\n"
      "exclude_frames: [1-1]\nleft_end: open\nchannels: [A]\n";
  const std::string sheet = "acquisition,batch,tube_width_um\na,\"x \"\"y\"\"\",100\n";
  std::mt19937 random(11);
  for (int round = 0; round < 400; ++round) {
    auto text = sidecar, rows = sheet;
    for (int i = 0; i < 3; ++i) {
      text[random() % text.size()] = static_cast<char>(random() & 255U);
      rows[random() % rows.size()] = static_cast<char>(random() & 255U);
    }
    write_text("a.yaml", text);
    write_text("acquisitions.csv", rows);
    read_all(folder_);
  }
}

}  // namespace
}  // namespace wavefount
