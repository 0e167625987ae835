#pragma once

#include <filesystem>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "pipeline.h"
#include "wavefount/core/film.h"
#include "wavefount/core/messages.h"

namespace wavefount {

/// What `record.json` says of one acquisition.
struct RunRecord {
  std::string acquisition;
  std::vector<std::string> film_acquisitions;  ///< all that came of the same film, its own first
  const FilmDescription& film;
  const Pipeline& pipeline;
  const Messages& messages;
  std::vector<std::pair<std::string, double>> stage_seconds;
  std::string fingerprint;
};

/// Throws Problem when it cannot be written.
void write_run_record(const std::filesystem::path& file, const RunRecord& record);

/// Text that differs whenever a result could: program version, steps and parameters as used, seed,
/// and what was understood of the film (files with size and time, sidecar). The sheet is left out:
/// it is joined anew to earlier results.
std::string fingerprint_of(const FilmDescription& film, const Pipeline& pipeline);

/// What an earlier run left of an acquisition.
struct EarlierResult {
  std::vector<std::string> film_acquisitions;
  std::string fingerprint;
  std::string message;
};

/// Empty when the folder holds no complete result.
std::optional<EarlierResult> read_earlier_result(const std::filesystem::path& folder);

/// Fills in the checksum of every input file. Throws Problem when one cannot be read.
void add_checksums(FilmDescription& film);

}  // namespace wavefount
