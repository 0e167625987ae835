#include "tiff_handle.h"

#include <array>
#include <cstdarg>
#include <cstdio>

namespace wavefount {
namespace {

/// A plane of 16384 × 16384 float pixels in one strip still decodes; a damaged byte count that asks
/// for more is an error instead of an allocation.
constexpr tmsize_t largest_allocation = tmsize_t{1} << 30;

struct FreeOptions {
  void operator()(TIFFOpenOptions* options) const { TIFFOpenOptionsFree(options); }
};

/// Returning 1 keeps libtiff from calling the handlers of the whole process.
int keep_error(TIFF*, void* kept, const char*, const char* format, va_list arguments) {
  std::array<char, 512> text{};
  std::vsnprintf(text.data(), text.size(), format, arguments);
  *static_cast<std::string*>(kept) = text.data();
  return 1;
}

int ignore_warning(TIFF*, void*, const char*, const char*, va_list) {
  return 1;
}

}  // namespace

TiffHandle::TiffHandle(const std::filesystem::path& file, const char* mode)
    : error_(std::make_unique<std::string>()) {
  const std::unique_ptr<TIFFOpenOptions, FreeOptions> options(TIFFOpenOptionsAlloc());
  TIFFOpenOptionsSetMaxSingleMemAlloc(options.get(), largest_allocation);
  TIFFOpenOptionsSetErrorHandlerExtR(options.get(), keep_error, error_.get());
  TIFFOpenOptionsSetWarningHandlerExtR(options.get(), ignore_warning, nullptr);
  tiff_.reset(TIFFOpenExt(file.c_str(), mode, options.get()));
}

}  // namespace wavefount
