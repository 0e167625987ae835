#pragma once

#include <filesystem>
#include <map>
#include <string>
#include <vector>

#include "wavefount/synthetic/scene.h"

namespace wavefount {

/// One table as rows of cells by column name, so that a test can spoil single cells.
using Cells = std::map<std::string, std::string>;
using ResultTables = std::map<std::string, std::vector<Cells>>;

/// The tables that a measurement without any error would leave for a scene.
ResultTables perfect_results(const Scene& scene);

/// Writes them as FOLDER/TABLE.csv.
void write_results(const ResultTables& tables, const std::filesystem::path& folder);

}  // namespace wavefount
