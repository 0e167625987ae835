#pragma once

#include <tiffio.h>

#include <filesystem>
#include <memory>
#include <string>

namespace wavefount {

/// An open TIFF whose errors and warnings are kept with it instead of being printed by handlers
/// that all of the process shares.
class TiffHandle {
 public:
  /// `mode` as TIFFOpen takes it. The handle is empty when the file cannot be opened; error() says
  /// why.
  TiffHandle(const std::filesystem::path& file, const char* mode);

  TIFF* get() const { return tiff_.get(); }
  explicit operator bool() const { return tiff_ != nullptr; }
  /// What libtiff last complained of; empty when nothing.
  const std::string& error() const { return *error_; }
  void forget_error() { error_->clear(); }
  void close() { tiff_.reset(); }

 private:
  struct Close {
    void operator()(TIFF* tiff) const { TIFFClose(tiff); }
  };

  std::unique_ptr<std::string> error_;  ///< outlives tiff_, which holds its address
  std::unique_ptr<TIFF, Close> tiff_;
};

}  // namespace wavefount
