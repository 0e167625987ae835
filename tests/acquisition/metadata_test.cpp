#include "film_folder.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

using testing::any_contains;
using Times = std::vector<double>;

class Metadata : public testing::FilmFolder {
 protected:
  /// A film of one image, its planes in the image's order.
  void write_image(const std::string& name, const OmeImage& image) const {
    TiffLayout layout;
    layout.description = ome_xml(name, {image});
    write_film(name, image.frames * image.z_planes * static_cast<int>(image.channels.size()),
               layout);
  }

  /// A film of four plain pages with this sidecar.
  FilmDescription with_sidecar(const std::string& text, int pages = 4) const {
    write_film("a.tif", pages);
    write_text("a.yaml", text);
    return open("a")->description();
  }

  std::string complaint_about(const std::string& text, int pages = 4) const {
    return testing::complaint([&] { with_sidecar(text, pages); });
  }
};

constexpr const char* scale = "pixel_size_um: 0.5\nframe_interval_min: 1.5\n";

TEST_F(Metadata, OfOmeXmlAreUnderstood) {
  OmeImage image = ome_image(3);
  image.channels = {"NLS <é>"};
  image.significant_bits = 12;
  image.exposure_min = 0.01;
  write_image("a.ome.tif", image);
  const auto film = open("a")->description();
  EXPECT_EQ(film.width, testing::film_width);
  EXPECT_EQ(film.height, testing::film_height);
  EXPECT_DOUBLE_EQ(film.pixel_um, 0.65);
  EXPECT_EQ(film.times_min, (Times{0, 2, 4}));
  EXPECT_EQ(film.channels, std::vector<std::string>{"NLS <é>"});
  EXPECT_EQ(film.bit_depth, 12);
  EXPECT_NEAR(film.exposure_min, 0.01, 1e-12);
  EXPECT_EQ(film.files.size(), 1U);
  EXPECT_EQ(film.files[0].bytes, std::filesystem::file_size(path("a.ome.tif")));
  EXPECT_TRUE(any_contains(understood(film), "3 frames of 75 × 42 pixels, 12 bits"));
  EXPECT_TRUE(any_contains(understood(film), "NLS <é> (reporter)"));
}

TEST_F(Metadata, StampsOfPlanesAreReadInEachUnit) {
  for (const char* unit : {"ms", "s", "min", "h"}) {
    OmeImage image = ome_image(3);
    image.delta_min = {5, 6, 8.5};
    image.time_unit = unit;
    write_image("a.ome.tif", image);
    const auto times = open("a")->description().times_min;
    ASSERT_EQ(times.size(), 3U);
    EXPECT_NEAR(times[1], 1, 1e-9);
    EXPECT_NEAR(times[2], 3.5, 1e-9);
  }
}

TEST_F(Metadata, StampsThatDoNotRiseNameTheFrame) {
  OmeImage image = ome_image(3);
  image.delta_min = {0, 2, 1};
  write_image("a.ome.tif", image);
  EXPECT_NE(complaint_on_opening("a").find("backwards at frame 2"), std::string::npos);
  EXPECT_NE(complaint_on_opening("a").find("a.yaml"), std::string::npos);
  write_sidecar("a");
  EXPECT_EQ(open("a")->description().times_min, (Times{0, 1.5, 3}));
}

TEST_F(Metadata, StampsThatAreAllZeroGiveWayToTheIncrement) {
  OmeImage image = ome_image(3);
  image.delta_min = {0, 0, 0};
  write_image("a.ome.tif", image);
  EXPECT_EQ(open("a")->description().times_min, (Times{0, 2, 4}));
}

TEST_F(Metadata, EveryDimensionOrderFindsItsPlanes) {
  for (const char* order : {"XYCZT", "XYCTZ", "XYZCT", "XYZTC", "XYTCZ", "XYTZC"}) {
    OmeImage image = ome_image(4);
    image.channels = {"A", "B"};
    image.z_planes = 3;
    image.order = order;
    write_image("a.ome.tif", image);
    auto reader = open("a", {"B", "", ""})->reader();
    const std::string letters = image.order.substr(2);
    for (const auto& [frame, channel, z] : {std::tuple{1, 0, 2}, std::tuple{3, 1, 0}}) {
      int page = 0, stride = 1;
      for (const char letter : letters) {
        page += stride * (letter == 'T' ? frame : letter == 'C' ? channel : z);
        stride *= letter == 'T' ? 4 : letter == 'C' ? 2 : 3;
      }
      expect_page(*reader->read(frame, channel, z), page);
    }
  }
}

TEST_F(Metadata, RolesGoByNameOrNumber) {
  OmeImage image = ome_image(2);
  image.channels = {"NLS", "DIC", "tubulin"};
  write_image("a.ome.tif", image);
  const auto by_name = open("a", {"nls", "DIC", "3"})->description();
  EXPECT_EQ(by_name.reporter, 0);
  EXPECT_EQ(by_name.brightfield, 1);
  EXPECT_EQ(by_name.field, 2);
  EXPECT_EQ(open("a", {"", "DIC", "NLS"})->description().reporter, 2);
  EXPECT_NE(complaint_on_opening("a").find("NLS, DIC, tubulin"), std::string::npos);
  EXPECT_NE(complaint_on_opening("a", {"GFP", "", ""}).find("GFP"), std::string::npos);
  EXPECT_NE(complaint_on_opening("a", {"DIC", "2", ""}).find("two parts"), std::string::npos);
  const auto without = open("a", {"1", "BF", ""})->description();
  EXPECT_EQ(without.brightfield, -1);
  EXPECT_TRUE(any_contains(without.notes, "BF"));
}

TEST_F(Metadata, PixelsThatAreNotSquareAreRefusedUnlessTheSidecarKnows) {
  TiffLayout layout;
  layout.description = ome_xml("a.ome.tif", {ome_image(1)});
  const std::string y = "PhysicalSizeY=\"0.65\"";
  layout.description.replace(layout.description.find(y), y.size(), "PhysicalSizeY=\"1.3\"");
  write_film("a.ome.tif", 1, layout);
  EXPECT_NE(complaint_on_opening("a").find("square"), std::string::npos);
  write_sidecar("a");
  EXPECT_DOUBLE_EQ(open("a")->description().pixel_um, 0.5);
}

TEST_F(Metadata, DamagedOmeXmlLeavesTheFilmToItsSidecar) {
  TiffLayout layout;
  layout.description = ome_xml("a.ome.tif", {ome_image(2)}).substr(0, 500);
  write_film("a.ome.tif", 2, layout);
  EXPECT_TRUE(any_contains(list_films(folder_).messages, "OME-XML"));
  write_sidecar("a");
  EXPECT_EQ(open("a")->description().frames, 2);
}

TEST_F(Metadata, ExternalEntitiesAreNotFollowed) {
  write_text("secret", "SECRET");
  TiffLayout layout;
  OmeImage image = ome_image(1);
  image.channels = {"PLACE"};
  std::string xml = ome_xml("a.ome.tif", {image});
  const std::string head = "<?xml version=\"1.0\" encoding=\"UTF-8\"?>";
  xml.replace(
      xml.find(head), head.size(),
      head + "<!DOCTYPE OME [<!ENTITY s SYSTEM \"file://" + path("secret").string() + "\">]>");
  xml.replace(xml.find("PLACE"), 5, "&s;");
  layout.description = xml;
  write_film("a.ome.tif", 1, layout);
  EXPECT_EQ(open("a")->description().channels, std::vector<std::string>{"&s;"});
}

TEST_F(Metadata, AbsurdSizesInOmeXmlAreRefused) {
  TiffLayout layout;
  layout.description = ome_xml("a.ome.tif", {ome_image(2)});
  const std::string size = "SizeT=\"2\"";
  layout.description.replace(layout.description.find(size), size.size(), "SizeT=\"2000000000\"");
  write_film("a.ome.tif", 2, layout);
  EXPECT_TRUE(any_contains(list_films(folder_).messages, "sizes"));
}

TEST_F(Metadata, WhatIsMissingComesWithTheLineToWrite) {
  write_film("my film.tif", 3);
  const auto complaint = complaint_on_opening("my film");
  EXPECT_NE(complaint.find("pixel_size_um: 0.65"), std::string::npos) << complaint;
  EXPECT_NE(complaint.find("frame_interval_min: 1"), std::string::npos) << complaint;
  EXPECT_NE(complaint.find("my film.yaml"), std::string::npos) << complaint;
  write_text("my film.yaml", "pixel_size_um: 0.5\n");
  EXPECT_EQ(complaint_on_opening("my film").find("pixel_size_um"), std::string::npos);
  write_film("one.tif", 1);
  write_text("one.yaml", "pixel_size_um: 0.5\n");
  EXPECT_EQ(open("one")->description().times_min, Times{0});
}

TEST_F(Metadata, EverySidecarKeyIsKept) {
  const auto film = with_sidecar(
      "pixel_size_um: 0.5\ntimes_min: [3, 4, 6.5, 8]\nchannels: [NLS]\norder: TC\nz_planes: 1\n"
      "optics: sectioned\nbit_depth: 12\ngain_electrons_per_count: 0.46\n"
      "read_noise_electrons: 1.6\ndark_offset_counts: 100\ntube_width_um: 120\nleft_end: closed\n"
      "right_end: open\nupper_wall: closed\nlower_wall: open\n"
      "outline: [[0, 0], [30, 0], [30, 20]]\nexclude_frames: [1, 3-9]\n"
      "exclude: [[[0, 0], [1, 0], [1, 1]], [[2, 2], [3, 2], [3, 3]]]\n"
      "first_healthy_min: 0\nlast_healthy_min: 3\n");
  EXPECT_EQ(film.times_min, (Times{0, 1, 3.5, 5}));
  EXPECT_EQ(film.channels, std::vector<std::string>{"NLS"});
  EXPECT_EQ(film.optics, Optics::sectioned);
  EXPECT_EQ(film.bit_depth, 12);
  EXPECT_DOUBLE_EQ(film.camera.gain_electrons_per_count.value(), 0.46);
  EXPECT_DOUBLE_EQ(film.camera.read_noise_electrons.value(), 1.6);
  EXPECT_DOUBLE_EQ(film.camera.dark_offset_counts.value(), 100);
  const auto& given = film.overrides;
  EXPECT_DOUBLE_EQ(given.tube_width_um.value(), 120);
  EXPECT_EQ(given.left_end, Boundary::closed);
  EXPECT_EQ(given.right_end, Boundary::open);
  EXPECT_EQ(given.upper_wall, Boundary::closed);
  EXPECT_EQ(given.lower_wall, Boundary::open);
  EXPECT_EQ(given.outline_um.size(), 3U);
  EXPECT_DOUBLE_EQ(given.outline_um[2].y, 20);
  EXPECT_EQ(given.exclude_frames, (std::vector<int>{1, 3}));
  EXPECT_EQ(given.exclude_um.size(), 2U);
  EXPECT_DOUBLE_EQ(given.first_healthy_min.value(), 0);
  EXPECT_DOUBLE_EQ(given.last_healthy_min.value(), 3);
  EXPECT_TRUE(any_contains(film.notes, "excludes frame 4"));
  EXPECT_EQ(film.files.size(), 2U);
}

TEST_F(Metadata, ChannelsOrderAndPlanesMapPagesToFrames) {
  write_film("a.tif", 12);
  write_sidecar("a", "channels: [NLS, DIC]\nz_planes: 3\norder: ZCT\n");
  const auto film = open("a", {"NLS", "DIC", ""});
  EXPECT_EQ(film->description().frames, 2);
  expect_page(*film->reader()->read(1, 1, 2), 11);
  expect_page(*film->reader()->read(1, 0, 1), 7);
  write_sidecar("a", "channels: [NLS, DIC]\nz_planes: 3\norder: TZC\n");
  expect_page(*open("a", {"NLS", "DIC", ""})->reader()->read(1, 0, 1), 3);
  write_sidecar("a", "channels: [NLS, DIC]\norder: T\n");
  EXPECT_NE(complaint_on_opening("a", {"NLS", "", ""}).find("order"), std::string::npos);
  write_sidecar("a", "channels: [A, B, C, D, E]\n");
  const auto cut = open("a", {"A", "", ""})->description();
  EXPECT_EQ(cut.frames, 2);
  EXPECT_TRUE(any_contains(cut.notes, "last 2 pages"));
  write_sidecar("a", "channels: [A, B, C, D, E]\norder: TC\n");
  EXPECT_NE(complaint_on_opening("a", {"A", "", ""}), "");
}

TEST_F(Metadata, TimesComeFromAFile) {
  write_text("stamps.csv", "minutes\n1\n2\n4\n8\n");
  const auto film = with_sidecar("pixel_size_um: 0.5\ntimes_file: stamps.csv\n");
  EXPECT_EQ(film.times_min, (Times{0, 1, 3, 7}));
  EXPECT_EQ(film.files.size(), 3U);
  write_text("stamps.csv", "1\n2\nx\n8\n");
  EXPECT_NE(complaint_about("pixel_size_um: 0.5\ntimes_file: stamps.csv\n").find("line 3"),
            std::string::npos);
  EXPECT_NE(complaint_about("pixel_size_um: 0.5\ntimes_file: none.csv\n").find("none.csv"),
            std::string::npos);
}

TEST_F(Metadata, TimesMustFitTheFrames) {
  EXPECT_NE(complaint_about("pixel_size_um: 1\ntimes_min: [0, 1, 2]\n").find("3 times"),
            std::string::npos);
  EXPECT_NE(complaint_about("pixel_size_um: 1\ntimes_min: [0, 1, 1, 2]\n").find("frame 2"),
            std::string::npos);
  EXPECT_NE(complaint_about("pixel_size_um: 1\ntimes_min: [0, 1, 0.5, 2]\n").find("backwards"),
            std::string::npos);
  EXPECT_NE(
      complaint_about("pixel_size_um: 1\nframe_interval_min: 1\ntimes_min: [0, 1]\n").find("two "),
      std::string::npos);
}

TEST_F(Metadata, UnknownKeysGetTheNearestKnownOne) {
  const auto film = with_sidecar(std::string(scale) + "gain_electron_per_count: 2\n");
  EXPECT_TRUE(any_contains(film.notes, "gain_electrons_per_count"));
  EXPECT_TRUE(any_contains(film.notes, "line 3"));
}

class BadSidecar : public Metadata, public ::testing::WithParamInterface<const char*> {
 protected:
  void SetUp() override {
    folder_ = std::filesystem::path(::testing::TempDir()) /
              ("wavefount-bad-sidecar-" + std::to_string(::getpid()));
    std::filesystem::remove_all(folder_);
    std::filesystem::create_directories(folder_);
  }
};

TEST_P(BadSidecar, IsRefusedWithItsLine) {
  const auto complaint = complaint_about(std::string(scale) + GetParam() + "\n");
  EXPECT_NE(complaint.find("a.yaml"), std::string::npos) << complaint;
  EXPECT_NE(complaint.find("line 3"), std::string::npos) << complaint;
}

INSTANTIATE_TEST_SUITE_P(
    EachKey, BadSidecar,
    ::testing::Values("tube_width_um: wide", "tube_width_um: -3", "tube_width_um: .nan",
                      "tube_width_um: 0,65", "tube_width_um: [1, 2]", "channels: NLS",
                      "channels: [A, A]", "channels: []", "order: TCX", "order: TT", "z_planes: 0",
                      "z_planes: 1.5", "optics: confocal", "bit_depth: 64", "left_end: ajar",
                      "outline: [[0, 0], [1, 1]]", "outline: [[0, 0], [1, 1], [2]]", "outline: 3",
                      "exclude_frames: [-1]", "exclude_frames: [5-2]", "exclude_frames: {a: 1}",
                      "exclude: [[0, 0]]", "read_noise_electrons: -1", "key: unclosed]: [",
                      "\t- tab", "last_healthy_min:"));

TEST_F(Metadata, SidecarsOfAnotherShapeAreRefused) {
  EXPECT_NE(complaint_about("- a\n- b\n").find("key: value"), std::string::npos);
  EXPECT_NE(complaint_about(std::string(scale) + "bit_depth: 8\nbit_depth: 9\n").find("twice"),
            std::string::npos);
  EXPECT_NE(complaint_about(std::string(5'000'000, '#')).find("4 MiB"), std::string::npos);
  EXPECT_NE(complaint_about("outline: " + std::string(100'000, '[')), "");
  EXPECT_NE(complaint_about("first_healthy_min: 5\nlast_healthy_min: 4\n").find("healthy"),
            std::string::npos);
  EXPECT_NE(complaint_about(std::string(scale) + "exclude_frames: [0-3]\n").find("All frames"),
            std::string::npos);
}

TEST_F(Metadata, TheSheetKnowsTheExposure) {
  write_text("acquisitions.csv", "acquisition,exposure_ms\na,600\n");
  EXPECT_NEAR(with_sidecar(scale).exposure_min, 0.01, 1e-12);
  write_text("acquisitions.csv", "acquisition,exposure_ms\na,600000\n");
  const auto film = with_sidecar(scale);
  EXPECT_EQ(film.exposure_min, 0);
  EXPECT_TRUE(any_contains(film.notes, "exposure"));
}

}  // namespace
}  // namespace wavefount
