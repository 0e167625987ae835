#pragma once

#include <filesystem>

#include "wavefount/acquisition/listing.h"

namespace wavefount {

/// Joins `acquisitions.csv`, if the folder has one, to the films found. A row for no film and a
/// film without a row become messages; a film with two rows gets a problem. Throws Problem when the
/// sheet cannot be read or lacks the column `acquisition`.
void join_sheet(const std::filesystem::path& folder, FolderListing& listing);

}  // namespace wavefount
