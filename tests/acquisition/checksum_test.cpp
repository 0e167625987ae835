#include "wavefount/acquisition/checksum.h"

#include "work_folder.h"

namespace wavefount {
namespace {

using Checksum = testing::WorkFolder;

TEST_F(Checksum, OfAnEmptyFileIsThePublishedValue) {
  // XXH3-128 of no bytes, seed 0 (xxHash's own test vectors).
  EXPECT_EQ(checksum(write_text("empty", "")), "99aa06d3014798d86001c324468d497f");
}

TEST_F(Checksum, SeesOneChangedByteBeyondTheFirstBlock) {
  std::string text(3'000'000, 'a');
  const auto before = checksum(write_text("long", text));
  text[2'500'000] = 'b';
  EXPECT_NE(checksum(write_text("long", text)), before);
  EXPECT_EQ(before.size(), 32U);
}

TEST_F(Checksum, OfAMissingFileOrAFolderIsAProblem) {
  EXPECT_NE(testing::complaint([&] { checksum(path("none")); }).find("none"), std::string::npos);
  EXPECT_NE(testing::complaint([&] { checksum(folder_); }), "");
}

}  // namespace
}  // namespace wavefount
