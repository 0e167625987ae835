#pragma once

#include <filesystem>
#include <set>
#include <string>
#include <vector>

#include "ome_metadata.h"

namespace wavefount {

/// Which file of the folder an OME-XML means by the names in its TiffData.
class OmeFiles {
 public:
  /// `own`: the TIFF (or companion file) in which the metadata was found.
  OmeFiles(const OmeMetadata& metadata, const std::filesystem::path& own);

  /// The file with the block's planes; it need not exist. Empty for a name that leaves the folder.
  std::filesystem::path file_of(const OmeBlock& block) const;
  /// All files named for all images, in the order in which they are first named.
  const std::vector<std::filesystem::path>& all() const { return all_; }

 private:
  std::filesystem::path own_;
  std::string uuid_;
  bool renamed_ = false;  ///< the one file named is this one under an earlier name
  std::vector<std::filesystem::path> all_;
};

}  // namespace wavefount
