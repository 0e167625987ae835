#include <gtest/gtest.h>

#include "wavefount/core/doubts.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/record_store.h"

namespace wavefount {
namespace {

TEST(RecordStore, GivesBackWhatWasPut) {
  RecordStore store;
  EXPECT_FALSE(store.has<Doubts>());
  EXPECT_EQ(store.peek<Doubts>(), nullptr);
  store.put(Doubts{{{"focus", "The focus was lost.", 0.5}}});
  store.edit<Doubts>().doubts.push_back({"drift", "The stage jumped.", 0.2});
  EXPECT_EQ(store.get<Doubts>().doubts.size(), 2U);
  EXPECT_EQ(store.names(), std::vector<std::string>{"doubts"});
}

TEST(RecordStore, CopiesShareUntilARecordIsPutAnew) {
  RecordStore film;
  film.put(Drift{{1, 2}, {0, 0}, {}});
  RecordStore tube = film;
  tube.put(Drift{{5}, {5}, {}});
  EXPECT_EQ(film.get<Drift>().x_px.size(), 2U);
  EXPECT_EQ(tube.get<Drift>().x_px.size(), 1U);
}

TEST(RecordStore, NamesWhatIsMissing) {
  const RecordStore store;
  try {
    (void)store.get<Observations>();
    FAIL();
  } catch (const Problem& problem) {
    EXPECT_NE(std::string(problem.what()).find("'observations'"), std::string::npos);
  }
}

}  // namespace
}  // namespace wavefount
