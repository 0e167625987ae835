#pragma once

#include <filesystem>
#include <map>
#include <optional>
#include <string>
#include <vector>

namespace wavefount {

/// What was found in one acquisition.
struct AcquisitionSummary {
  std::string name;
  bool done = false;
  std::string message;
  long long nuclei = 0;
  long long waves = 0;
  long long waves_in_review = 0;
  std::map<std::string, int> answers;  ///< waves by answer, terminal ones left out
  int terminal_waves = 0;
  std::vector<double> speeds_um_per_min;  ///< of the waves that are not terminal and have one
};

/// What was found in a folder. Terminal waves enter no answer, origin or speed.
struct FolderSummary {
  std::vector<AcquisitionSummary> acquisitions;  ///< in the order of the table
  std::map<std::string, int> answers;
  std::map<std::string, int> origin_sites;    ///< claimed origins by site
  std::map<std::string, int> review_reasons;  ///< rows of the review list by reason
  std::vector<double> speeds_um_per_min;
  int terminal_waves = 0;

  int done() const;
  int failed() const;
  long long nuclei() const;
  long long waves() const;
  int review_rows() const;
};

/// Reads the joined tables `acquisitions`, `waves`, `origins` and `review` of an output folder.
/// Throws Problem when one is missing.
FolderSummary summarised(const std::filesystem::path& folder);

/// What was found in one acquisition, in a sentence for people.
std::string in_words(const AcquisitionSummary& acquisition);

/// A value of `waves.answer` as people say it, for "3 ..."; the value itself when it is not known.
std::string answer_in_words(const std::string& answer);
/// A value of `origins.site` as people say it.
std::string site_in_words(const std::string& site);

}  // namespace wavefount
