#include "wavefount/tables/folder_summary.h"

#include <algorithm>
#include <functional>
#include <set>
#include <utility>

#include "wavefount/acquisition/csv_reader.h"
#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"
#include "wavefount/core/wave.h"

namespace wavefount {
namespace {

using Lookup = std::function<std::string(const std::string& column)>;

/// Walks the rows of a joined table; `visit` gets a look-up of cells by column.
void each_row(const std::filesystem::path& folder, const std::string& table,
              const std::function<void(const Lookup&)>& visit) {
  CsvReader reader(folder / (table + ".csv"));
  std::vector<std::string> header;
  std::vector<std::string> cells;
  reader.next(header);
  const Lookup lookup = [&](const std::string& column) {
    const auto at = std::find(header.begin(), header.end(), column) - header.begin();
    const auto index = static_cast<std::size_t>(at);
    return index < cells.size() ? cells[index] : std::string();
  };
  while (reader.next(cells)) visit(lookup);
}

using WaveKey = std::pair<std::string, std::string>;  // acquisition and wave

WaveKey key_of(const Lookup& row) {
  return {row("acquisition"), row("wave")};
}

class Summariser {
 public:
  explicit Summariser(const std::filesystem::path& folder) : folder_(folder) {}

  FolderSummary run() {
    each_row(folder_, "acquisitions", [&](const Lookup& row) { add_acquisition(row); });
    each_row(folder_, "waves", [&](const Lookup& row) { add_wave(row); });
    each_row(folder_, "origins", [&](const Lookup& row) { add_origin(row); });
    each_row(folder_, "review", [&](const Lookup& row) { ++found_.review_reasons[row("reason")]; });
    return std::move(found_);
  }

 private:
  void add_acquisition(const Lookup& row) {
    AcquisitionSummary one;
    one.name = row("acquisition");
    one.done = row("status") == "done";
    one.message = row("message");
    one.nuclei = parse_integer(row("nuclei")).value_or(0);
    one.waves = parse_integer(row("waves")).value_or(0);
    one.waves_in_review = parse_integer(row("waves_in_review")).value_or(0);
    position_[one.name] = found_.acquisitions.size();
    found_.acquisitions.push_back(std::move(one));
  }

  void add_wave(const Lookup& row) {
    const auto at = position_.find(row("acquisition"));
    if (at == position_.end()) return;
    auto& acquisition = found_.acquisitions[at->second];
    if (row("fate") == name_of(Fate::terminal)) {
      terminal_.insert(key_of(row));
      ++acquisition.terminal_waves;
      ++found_.terminal_waves;
      return;
    }
    ++acquisition.answers[row("answer")];
    ++found_.answers[row("answer")];
    if (const auto speed = parse_number(row("speed_um_per_min"))) {
      acquisition.speeds_um_per_min.push_back(*speed);
      found_.speeds_um_per_min.push_back(*speed);
    }
  }

  void add_origin(const Lookup& row) {
    if (row("claimed") == "yes" && !terminal_.contains(key_of(row)))
      ++found_.origin_sites[row("site")];
  }

  const std::filesystem::path& folder_;
  FolderSummary found_;
  std::map<std::string, std::size_t> position_;
  std::set<WaveKey> terminal_;
};

std::string counted(long long count, const std::string& one, const std::string& many) {
  return std::to_string(count) + ' ' + (count == 1 ? one : many);
}

/// The answers, most frequent first, as "4 from one origin, 1 all together".
std::string answers_in_words(const AcquisitionSummary& acquisition) {
  std::vector<std::pair<int, std::string>> parts;
  for (const auto& [answer, count] : acquisition.answers)
    parts.emplace_back(count, answer_in_words(answer));
  if (acquisition.terminal_waves > 0)
    parts.emplace_back(acquisition.terminal_waves, "final (arrest or death)");
  std::stable_sort(parts.begin(), parts.end(),
                   [](const auto& left, const auto& right) { return left.first > right.first; });
  std::vector<std::string> texts;
  for (const auto& [count, words] : parts) texts.push_back(std::to_string(count) + ' ' + words);
  return joined(texts, ", ");
}

}  // namespace

int FolderSummary::done() const {
  return static_cast<int>(std::count_if(acquisitions.begin(), acquisitions.end(),
                                        [](const auto& one) { return one.done; }));
}

int FolderSummary::failed() const {
  return static_cast<int>(acquisitions.size()) - done();
}

long long FolderSummary::nuclei() const {
  long long sum = 0;
  for (const auto& one : acquisitions) sum += one.nuclei;
  return sum;
}

long long FolderSummary::waves() const {
  long long sum = 0;
  for (const auto& one : acquisitions) sum += one.waves;
  return sum;
}

int FolderSummary::review_rows() const {
  int sum = 0;
  for (const auto& [reason, count] : review_reasons) sum += count;
  return sum;
}

FolderSummary summarised(const std::filesystem::path& folder) {
  return Summariser(folder).run();
}

std::string in_words(const AcquisitionSummary& acquisition) {
  if (!acquisition.done) return "Not measured: " + acquisition.message;
  std::string words;
  if (acquisition.nuclei == 0) {
    words = "No nuclei found.";
  } else if (acquisition.waves == 0) {
    words = counted(acquisition.nuclei, "nucleus", "nuclei") + ", no mitotic wave.";
  } else {
    words = counted(acquisition.waves, "wave", "waves") + " over " +
            counted(acquisition.nuclei, "nucleus", "nuclei") + ": " +
            answers_in_words(acquisition) + '.';
    if (!acquisition.speeds_um_per_min.empty())
      words +=
          " Typical speed " + rounded_text(median(acquisition.speeds_um_per_min), 3) + " µm/min.";
  }
  if (!acquisition.message.empty()) words += " Note: " + acquisition.message;
  return words;
}

std::string answer_in_words(const std::string& answer) {
  static const std::map<std::string, std::string> words = {
      {"single", "from one origin"},
      {"coexisting", "from several origins at once"},
      {"enters-view", "coming in from outside the view"},
      {"synchronous", "everywhere together"},
      {"incoherent", "without order in space"},
      {"ambiguous", "with the origin undecided"},
      {"too-few", "with too few nuclei to tell"}};
  const auto at = words.find(answer);
  return at == words.end() ? answer : at->second;
}

std::string site_in_words(const std::string& site) {
  static const std::map<std::string, std::string> words = {
      {"end", "At an end of the tube"},
      {"wall", "At a wall"},
      {"interior", "Inside the tube"},
      {"view-edge", "At the edge of the view"}};
  const auto at = words.find(site);
  return at == words.end() ? site : at->second;
}

}  // namespace wavefount
