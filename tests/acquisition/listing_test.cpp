#include "film_folder.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

using testing::any_contains;

class Listing : public testing::FilmFolder {
 protected:
  std::vector<std::string> names() const {
    std::vector<std::string> all;
    for (const auto& film : list_films(folder_).films) all.push_back(film.name);
    return all;
  }
};

using Names = std::vector<std::string>;

TEST_F(Listing, FindsEachKindInNaturalOrder) {
  write_ome_film("film 10.ome.tif", 1);
  write_film("film 2.tif", 2);
  write_film("b.TIFF", 1);
  write_film("c.btf", 1);
  write_film("frames/t1.tif", 1);
  write_film("frames/t2.tif", 1);
  write_film("frames/t10.tif", 1);
  write_text("notes.txt", "nothing");
  write_text(".hidden.tif", "nothing");
  std::filesystem::create_directories(path("empty"));
  const auto listing = list_films(folder_);
  EXPECT_EQ(names(), (Names{"b", "c", "film 2", "film 10", "frames"}));
  EXPECT_EQ(listing.films[3].kind, FilmKind::ome);
  EXPECT_EQ(listing.films[4].kind, FilmKind::frames);
  EXPECT_EQ(listing.films[4].sidecar, path("frames.yaml"));
  EXPECT_TRUE(listing.messages.empty());
}

TEST_F(Listing, FramesComeInNaturalOrder) {
  write_film("frames/t10.tif", 1, {}, 2);
  write_film("frames/t2.tif", 1, {}, 1);
  write_film("frames/t1.tif", 1, {}, 0);
  write_sidecar("frames");
  const auto film = open("frames");
  ASSERT_EQ(film->description().frames, 3);
  auto reader = film->reader();
  for (int frame = 0; frame < 3; ++frame) expect_page(*reader->read(frame, 0, 0), frame);
}

TEST_F(Listing, PositionsOfAFileAreFilmsOfTheirOwn) {
  TiffLayout layout;
  OmeImage second = ome_image(3);
  second.pixel_um = 1.3;
  layout.description = ome_xml("a.ome.tif", {ome_image(2), second});
  write_film("a.ome.tif", 5, layout);
  EXPECT_EQ(names(), (Names{"a", "a/position-2"}));
  const auto film = open("a/position-2");
  EXPECT_EQ(film->description().frames, 3);
  EXPECT_DOUBLE_EQ(film->description().pixel_um, 1.3);
  expect_page(*film->reader()->read(0, 0, 0), 2);
  write_text("a.position-2.yaml", "pixel_size_um: 2\n");
  EXPECT_DOUBLE_EQ(open("a/position-2")->description().pixel_um, 2);
  EXPECT_DOUBLE_EQ(open("a")->description().pixel_um, 0.65);
}

class Sets : public Listing {
 protected:
  /// A film in two files that both hold the metadata.
  void write_set(const std::string& first = "s_1.ome.tif",
                 const std::string& second = "s_2.ome.tif") const {
    OmeImage image = ome_image(5);
    image.files = {{first, 3}, {second, 2}};
    TiffLayout layout;
    layout.description = ome_xml(first, {image});
    write_film(first, 3, layout);
    layout.description = ome_xml(second, {image});
    write_film(second, 2, layout, 3);
  }
};

TEST_F(Sets, AreOneFilm) {
  write_set();
  EXPECT_EQ(names(), Names{"s_1"});
  const auto film = open("s_1");
  EXPECT_EQ(film->description().frames, 5);
  EXPECT_EQ(film->description().files.size(), 2U);
  auto reader = film->reader();
  for (const int frame : {4, 0, 3, 2}) expect_page(*reader->read(frame, 0, 0), frame);
}

TEST_F(Sets, InAFolderOfTheirOwnAreOneFilm) {
  std::filesystem::create_directories(path("set"));
  write_set();
  for (const char* name : {"s_1.ome.tif", "s_2.ome.tif"}) {
    std::filesystem::rename(path(name), path("set") / name);
  }
  EXPECT_EQ(names(), Names{"set"});
  EXPECT_EQ(open("set")->description().frames, 5);
}

TEST_F(Sets, WithAMissingFileAreCutBeforeIt) {
  write_set();
  std::filesystem::remove(path("s_2.ome.tif"));
  const auto film = open("s_1");
  EXPECT_EQ(film->description().frames, 3);
  EXPECT_TRUE(any_contains(film->description().notes, "s_2.ome.tif"));
}

TEST_F(Sets, WhoseMetadataLieInALaterFileAreOneFilm) {
  OmeImage image = ome_image(2);
  image.files = {{"a_1.tif", 1}, {"z.ome.tif", 1}};
  write_film("a_1.tif", 1);
  TiffLayout layout;
  layout.description = ome_xml("z.ome.tif", {image});
  write_film("z.ome.tif", 1, layout, 1);
  EXPECT_EQ(names(), Names{"z"});
  expect_page(*open("z")->reader()->read(0, 0, 0), 0);
}

TEST_F(Sets, OfOneFileUnderANewNameStayReadable) {
  OmeImage image = ome_image(2);
  image.files = {{"old.ome.tif", 2}};
  TiffLayout layout;
  layout.description = ome_xml("old.ome.tif", {image});
  write_film("new.ome.tif", 2, layout);
  EXPECT_EQ(names(), Names{"new"});
  EXPECT_EQ(open("new")->description().frames, 2);
}

TEST_F(Sets, NamingFilesOutsideTheFolderDoNotReachThem) {
  OmeImage image = ome_image(2);
  image.files = {{"in.ome.tif", 1}, {"../../out.ome.tif", 1}};
  TiffLayout layout;
  layout.description = ome_xml("in.ome.tif", {image});
  write_film("in.ome.tif", 1, layout);
  EXPECT_EQ(open("in")->description().frames, 1);
}

TEST_F(Listing, MetadataInACompanionFileCount) {
  OmeImage image = ome_image(2);
  image.files = {{"p_1.tif", 1}, {"p_2.tif", 1}};
  write_text("set.companion.ome", ome_xml("set.companion.ome", {image}));
  write_film("p_1.tif", 1);
  write_film("p_2.tif", 1, {}, 1);
  EXPECT_EQ(names(), Names{"set"});
  expect_page(*open("set")->reader()->read(1, 0, 0), 1);
}

TEST_F(Listing, EqualNamesGetASentence) {
  write_film("a.tif", 1);
  write_ome_film("a.ome.tif", 1);
  const auto listing = list_films(folder_);
  ASSERT_EQ(listing.films.size(), 1U);
  EXPECT_NE(listing.films[0].problem.find("a.ome.tif"), std::string::npos);
  EXPECT_NE(complaint_on_opening("a").find("rename"), std::string::npos);
}

TEST_F(Listing, LinksThatLeadNowhereOrBackAreSafe) {
  write_film("a.tif", 1);
  std::filesystem::create_symlink("loop.tif", path("loop.tif"));
  std::filesystem::create_directory_symlink(".", path("back"));
  std::filesystem::create_symlink("gone.tif", path("dangling.tif"));
  const auto listing = list_films(folder_);
  EXPECT_EQ(names(), (Names{"a", "dangling", "loop"}));
  EXPECT_NE(listing.films[1].problem, "");
  EXPECT_NE(listing.films[2].problem, "");
  EXPECT_TRUE(any_contains(listing.messages, "back"));
}

TEST_F(Listing, NamesMayHoldAnything) {
  for (const char* name : {"=1+1", "a, \"b\"", "Prä parat é", "film\nline"}) {
    write_film(std::string(name) + ".tif", 1);
    write_sidecar(name);
    EXPECT_EQ(open(name)->description().frames, 1);
  }
  write_film("bad\xFF.tif", 1);
  EXPECT_NE(found("badÿ").problem, "");
}

TEST_F(Listing, FoldersOfFilmsAndEmptyFoldersAreExplained) {
  EXPECT_NE(testing::complaint([&] { list_films(folder_); }).find("no film"), std::string::npos);
  EXPECT_NE(testing::complaint([&] { list_films(path("none")); }).find("no folder"),
            std::string::npos);
  write_text("file", "");
  EXPECT_NE(testing::complaint([&] { list_films(path("file")); }), "");
  write_film("more/film.tif", 3);
  EXPECT_NE(found("more").problem.find("several pages"), std::string::npos);
}

TEST_F(Listing, SidecarsWithoutFilmAreMentioned) {
  write_film("film.tif", 1);
  write_sidecar("flim");
  EXPECT_TRUE(any_contains(list_films(folder_).messages, "flim.yaml"));
}

class Sheet : public Listing {
 protected:
  void SetUp() override {
    Listing::SetUp();
    write_film("a.tif", 1);
    write_film("b, c.tif", 1);
  }
};

TEST_F(Sheet, IsJoinedByName) {
  write_text("acquisitions.csv",
             "\xEF\xBB\xBF"
             "acquisition,batch,tube_width_um\r\na.tif,x,100\r\n\"b, c\",y,\r\n"
             "a/tube-2,z,200\r\n");
  const auto listing = list_films(folder_);
  EXPECT_EQ(listing.sheet_columns, (Names{"batch", "tube_width_um"}));
  EXPECT_EQ(found("a").sheet.at("tube_width_um"), "100");
  EXPECT_EQ(found("b, c").sheet.at("batch"), "y");
  EXPECT_EQ(listing.tube_rows.at("a/tube-2").at("batch"), "z");
  EXPECT_TRUE(listing.messages.empty());
}

TEST_F(Sheet, OfASpreadsheetWithSemicolonsAndCommasIsUnderstood) {
  write_text("acquisitions.csv", "acquisition;exposure_ms;operator\na;12,5;J\xF6rg\n");
  EXPECT_EQ(found("a").sheet.at("exposure_ms"), "12.5");
  EXPECT_EQ(found("a").sheet.at("operator"), "Jörg");
  EXPECT_TRUE(any_contains(list_films(folder_).messages, "\"b, c\""));
}

TEST_F(Sheet, WithRowsThatFitNothingSaysSo) {
  write_text("acquisitions.csv", "acquisition,tube_width_um\na,wide\nnone,3\na,4\n,5\n");
  const auto listing = list_films(folder_);
  EXPECT_TRUE(any_contains(listing.messages, "line 3"));
  EXPECT_TRUE(any_contains(listing.messages, "wide"));
  EXPECT_TRUE(any_contains(listing.messages, "line 5"));
  EXPECT_NE(found("a").problem.find("two rows"), std::string::npos);
}

TEST_F(Sheet, WithoutItsKeyColumnIsAProblem) {
  write_text("acquisitions.csv", "film,tube_width_um\na,3\n");
  EXPECT_THROW(list_films(folder_), Problem);
  write_text("acquisitions.csv", "acquisition,x,x\na,3,4\n");
  EXPECT_THROW(list_films(folder_), Problem);
}

}  // namespace
}  // namespace wavefount
