#include "wavefount/tables/workbook.h"

#include <gtest/gtest.h>

#include <thread>

#include "fake_results.h"
#include "scratch_folder.h"
#include "wavefount/core/problem.h"
#include "wavefount/tables/folder_summary.h"
#include "wavefount/tables/gather.h"

namespace wavefount {
namespace {

TEST(FolderSummary, CountsWhatTheTablesHold) {
  const fake::ScratchFolder folder;
  Messages messages;
  fake::write_results(folder.path(), messages);
  const auto summary = summarised(folder.path());
  EXPECT_EQ(summary.done(), 6);
  EXPECT_EQ(summary.failed(), 1);
  EXPECT_EQ(summary.terminal_waves, 1);
  EXPECT_EQ(summary.waves(), 9);
  EXPECT_EQ(summary.answers.at("single"), 5);
  EXPECT_EQ(summary.answers.at("ambiguous"), 3);
  EXPECT_EQ(summary.speeds_um_per_min.size(), 8U);
  EXPECT_EQ(summary.origin_sites.at("interior"), 5);
  EXPECT_EQ(summary.review_reasons.at("two candidates"), 3);
  EXPECT_EQ(summary.review_rows(), 12);
}

TEST(FolderSummary, SaysInWordsWhatWasFound) {
  AcquisitionSummary one;
  one.message = "It is not a TIFF.";
  EXPECT_EQ(in_words(one), "Not measured: It is not a TIFF.");
  one.done = true;
  one.message.clear();
  EXPECT_EQ(in_words(one), "No nuclei found.");
  one.nuclei = 1;
  EXPECT_EQ(in_words(one), "1 nucleus, no mitotic wave.");
  one.nuclei = 14;
  one.waves = 4;
  one.answers = {{"ambiguous", 1}, {"single", 2}};
  one.terminal_waves = 1;
  one.speeds_um_per_min = {20, 30};
  EXPECT_EQ(in_words(one),
            "4 waves over 14 nuclei: 2 from one origin, 1 with the origin undecided, 1 final "
            "(arrest or death). Typical speed 25 µm/min.");
}

TEST(Workbook, IsTheSameBytesEachTime) {
  const fake::ScratchFolder folder;
  Messages messages;
  fake::write_results(folder.path(), messages);
  const auto first = fake::bytes_of(folder.path() / "workbook.xlsx");
  EXPECT_GT(first.size(), 10'000U);
  std::this_thread::sleep_for(std::chrono::milliseconds(2100));  // zip dates have 2 s steps
  write_workbook(folder.path(), &messages);
  EXPECT_EQ(fake::bytes_of(folder.path() / "workbook.xlsx"), first);
  EXPECT_FALSE(std::filesystem::exists(folder.path() / "workbook.xlsx.part"));
  EXPECT_TRUE(messages.all().empty());
}

TEST(Workbook, SaysWhichSheetIsCut) {
  const fake::ScratchFolder folder;
  Messages messages;
  fake::write_results(folder.path(), messages);
  write_workbook(folder.path(), &messages, 5);
  EXPECT_NE(messages.summary().find("The sheet waves shows the first 4 of 9 rows"),
            std::string::npos)
      << messages.summary();
}

TEST(Workbook, IsWrittenForNoAcquisitionsAtAll) {
  const fake::ScratchFolder folder;
  FolderWork work;
  work.output = folder.path();
  gather_tables(work);
  write_workbook(folder.path(), nullptr);
  EXPECT_GT(std::filesystem::file_size(folder.path() / "workbook.xlsx"), 5'000U);
}

TEST(Workbook, NeedsTheTables) {
  const fake::ScratchFolder folder;
  EXPECT_THROW(write_workbook(folder.path(), nullptr), Problem);
  EXPECT_TRUE(std::filesystem::is_empty(folder.path()));
}

}  // namespace
}  // namespace wavefount
