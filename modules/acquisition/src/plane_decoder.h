#pragma once

#include <filesystem>
#include <vector>

#include "tiff_handle.h"
#include "tiff_page.h"
#include "wavefount/core/image.h"

namespace wavefount {

/// Decodes pages of one open TIFF straight into float images. Not thread-safe; one a worker.
class PlaneDecoder {
 public:
  /// Throws Problem when the file cannot be opened.
  explicit PlaneDecoder(const std::filesystem::path& file);

  const std::filesystem::path& file() const { return file_; }
  /// `page` as it was indexed. Throws Problem when the file has changed since, or its pixels are
  /// damaged.
  ImagePointer read(const TiffPage& page);

 private:
  void read_plain_strips(const TiffPage& page, float* pixels);
  void read_coded_strips(const TiffPage& page, float* pixels);
  void read_tiles(const TiffPage& page, float* pixels);
  void read_bytes(std::uint64_t offset, std::size_t bytes);
  [[noreturn]] void refuse(const std::string& what) const;

  std::filesystem::path file_;
  TiffHandle tiff_;
  std::vector<unsigned char> buffer_;
};

}  // namespace wavefount
