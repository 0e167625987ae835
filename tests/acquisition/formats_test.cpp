#include <tiffio.h>

#include <fstream>
#include <thread>
#include <tuple>

#include "film_folder.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

/// Pixel format, compression, tile side, big-endian, BigTIFF.
using Combination = std::tuple<PixelFormat, TiffCompression, int, bool, bool>;

class Formats : public testing::FilmFolder, public ::testing::WithParamInterface<Combination> {
 protected:
  void SetUp() override {
    folder_ = std::filesystem::path(::testing::TempDir()) /
              ("wavefount-formats-" + std::to_string(::getpid()));
    std::filesystem::remove_all(folder_);
    std::filesystem::create_directories(folder_);
  }
};

TEST_P(Formats, ReadBackAsWritten) {
  TiffLayout layout;
  std::tie(layout.format, layout.compression, layout.tile_px, layout.big_endian, layout.big_tiff) =
      GetParam();
  if (layout.format == PixelFormat::packed12 && layout.tile_px > 0) {
    EXPECT_NE(testing::complaint([&] { TiffWriter(path("a.tif"), layout); }), "");
    return;
  }
  layout.predictor = layout.big_endian;
  layout.rows_per_strip = 5;
  write_ome_film("a.ome.tif", 3, layout);
  const auto film = open("a");
  auto reader = film->reader();
  const int modulus = layout.format == PixelFormat::unsigned8 ? 256 : 4096;
  for (const int frame : {2, 0, 1}) expect_page(*reader->read(frame, 0, 0), frame, modulus);
}

INSTANTIATE_TEST_SUITE_P(
    All, Formats,
    ::testing::Combine(::testing::Values(PixelFormat::unsigned8, PixelFormat::packed12,
                                         PixelFormat::unsigned16, PixelFormat::unsigned32,
                                         PixelFormat::float32),
                       ::testing::Values(TiffCompression::none, TiffCompression::lzw,
                                         TiffCompression::deflate, TiffCompression::zstd),
                       ::testing::Values(0, 32), ::testing::Bool(), ::testing::Bool()));

using Reading = testing::FilmFolder;

/// A page written with libtiff itself, for what the writer does not write.
class RawPage {
 public:
  RawPage(const std::filesystem::path& file, int bits, int samples, int photometric)
      : tiff_(TIFFOpen(file.c_str(), "w")) {
    TIFFSetField(tiff_, TIFFTAG_IMAGEWIDTH, 4);
    TIFFSetField(tiff_, TIFFTAG_IMAGELENGTH, 1);
    TIFFSetField(tiff_, TIFFTAG_BITSPERSAMPLE, bits);
    TIFFSetField(tiff_, TIFFTAG_SAMPLESPERPIXEL, samples);
    TIFFSetField(tiff_, TIFFTAG_PHOTOMETRIC, photometric);
    TIFFSetField(tiff_, TIFFTAG_PLANARCONFIG, PLANARCONFIG_CONTIG);
    TIFFSetField(tiff_, TIFFTAG_ROWSPERSTRIP, 1);
  }
  RawPage(const RawPage&) = delete;
  RawPage& operator=(const RawPage&) = delete;
  ~RawPage() { TIFFClose(tiff_); }

  TIFF* tiff() const { return tiff_; }
  void write(std::vector<unsigned char> bytes) {
    TIFFWriteEncodedStrip(tiff_, 0, bytes.data(), static_cast<tmsize_t>(bytes.size()));
  }

 private:
  TIFF* tiff_;
};

TEST_F(Reading, InvertsMinIsWhiteAndSaysSo) {
  RawPage(path("a.tif"), 8, 1, PHOTOMETRIC_MINISWHITE).write({0, 1, 250, 255});
  write_sidecar("a");
  const auto film = open("a");
  const auto image = film->reader()->read(0, 0, 0);
  EXPECT_EQ(image->GetBufferPointer()[0], 255);
  EXPECT_EQ(image->GetBufferPointer()[2], 5);
  EXPECT_TRUE(testing::any_contains(film->description().notes, "inverted"));
}

TEST_F(Reading, TakesSignedIntegers) {
  {
    RawPage page(path("a.tif"), 16, 1, PHOTOMETRIC_MINISBLACK);
    TIFFSetField(page.tiff(), TIFFTAG_SAMPLEFORMAT, SAMPLEFORMAT_INT);
    page.write({0xFE, 0xFF, 0, 0, 1, 0, 0, 1});
  }
  write_sidecar("a");
  const auto image = open("a")->reader()->read(0, 0, 0);
  EXPECT_EQ(image->GetBufferPointer()[0], -2);
  EXPECT_EQ(image->GetBufferPointer()[3], 256);
}

TEST_F(Reading, RefusesColourAndOddSamples) {
  RawPage(path("a.tif"), 8, 3, PHOTOMETRIC_RGB).write(std::vector<unsigned char>(12, 7));
  write_sidecar("a");
  EXPECT_NE(complaint_on_opening("a").find("colour"), std::string::npos);
  RawPage(path("b.tif"), 1, 1, PHOTOMETRIC_MINISBLACK).write({0xF0});
  write_sidecar("b");
  EXPECT_NE(complaint_on_opening("b").find("1 bits"), std::string::npos);
}

TEST_F(Reading, ManyReadersAtOnceSeeTheSamePixels) {
  TiffLayout layout;
  layout.compression = TiffCompression::deflate;
  write_ome_film("a.ome.tif", 40, layout);
  const auto film = open("a");
  std::vector<std::thread> threads;
  for (int start = 0; start < 4; ++start) {
    threads.emplace_back([&film, start] {
      auto reader = film->reader();
      for (int i = 0; i < 40; ++i) {
        const int frame = (i * 7 + start * 11) % 40;
        expect_page(*reader->read(frame, 0, 0), frame);
      }
    });
  }
  for (auto& thread : threads) thread.join();
}

TEST_F(Reading, OutsideTheFilmIsAProblem) {
  write_ome_film("a.ome.tif", 2);
  const auto film = open("a");
  auto reader = film->reader();
  EXPECT_THROW(reader->read(2, 0, 0), Problem);
  EXPECT_THROW(reader->read(0, 1, 0), Problem);
  EXPECT_THROW(reader->read(-1, 0, 0), Problem);
}

TEST_F(Reading, AFileThatChangesMeanwhileIsAProblem) {
  write_ome_film("a.ome.tif", 3);
  const auto film = open("a");
  auto reader = film->reader();
  reader->read(0, 0, 0);
  std::filesystem::resize_file(path("a.ome.tif"), 1000);
  EXPECT_THROW(reader->read(2, 0, 0), Problem);
  EXPECT_THROW(film->reader()->read(2, 0, 0), Problem);
}

using Writing = testing::FilmFolder;

TEST_F(Writing, LeavesNothingBehindUnlessCommitted) {
  {
    TiffWriter writer(path("a.tif"), {});
    write_page(writer, PixelFormat::unsigned16, 0);
    EXPECT_EQ(writer.pages(), 1);
  }
  EXPECT_TRUE(std::filesystem::is_empty(folder_));
}

TEST_F(Writing, RefusesWhatDoesNotFit) {
  TiffLayout layout;
  layout.format = PixelFormat::packed12;
  TiffWriter writer(path("a.tif"), layout);
  const std::vector<std::uint16_t> bright(12, 4096);
  EXPECT_THROW(writer.write(bright.data(), 4, 3), Problem);
  const std::vector<float> real(12, 1);
  EXPECT_THROW(writer.write(real.data(), 4, 3), Problem);
  EXPECT_THROW(TiffWriter(path("none/a.tif"), {}), Problem);
  layout.tile_px = 20;
  EXPECT_THROW(TiffWriter(path("b.tif"), layout), Problem);
}

TEST_F(Writing, TheSameFilmGetsTheSameBytes) {
  const auto bytes = [&](const std::string& name) {
    std::ifstream stream(path(name), std::ios::binary);
    return std::string(std::istreambuf_iterator<char>(stream), {});
  };
  write_ome_film("a.ome.tif", 2);
  const auto first = bytes("a.ome.tif");
  write_ome_film("a.ome.tif", 2);
  EXPECT_EQ(first, bytes("a.ome.tif"));
  EXPECT_NE(ome_uuid("a"), ome_uuid("b"));
}

}  // namespace
}  // namespace wavefount
