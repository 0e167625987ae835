#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include "fake_records.h"
#include "wavefount/core/step.h"

namespace wavefount::fake {

/// Writes the CSV tables of one scene into FOLDER/NAME and describes them as a folder step sees it.
AcquisitionResult write_acquisition(const std::filesystem::path& folder, const Scene& scene);

/// A folder of several acquisitions, one of them failed, with names that spreadsheets and CSV find
/// hard, gathered and with its workbook.
FolderWork write_results(const std::filesystem::path& folder, Messages& messages);

}  // namespace wavefount::fake
