#include "tiff_index.h"

#include "directory_chain.h"
#include "tiff_handle.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

/// Ten years at a plane every five minutes; a chain that claims more is damaged or hostile.
constexpr std::size_t most_pages = 1'000'000;

DirectoryChain chain_with_a_page(const std::filesystem::path& file, std::size_t most) {
  auto chain = walk_directories(file, most);
  if (!chain.directories.empty()) return chain;
  throw Problem("The file " + file.filename().string() + " holds no whole page" +
                (chain.broken.empty() ? "" : ": " + chain.broken) +
                "; copy it again from where it was recorded.");
}

TiffHandle opened(const std::filesystem::path& file) {
  TiffHandle tiff(file, "rmh");
  if (!tiff) {
    throw Problem("The file " + file.filename().string() +
                  " cannot be read as TIFF: " + tiff.error() + ".");
  }
  return tiff;
}

std::string description_of(TIFF* tiff) {
  const char* text = nullptr;
  return TIFFGetField(tiff, TIFFTAG_IMAGEDESCRIPTION, &text) == 1 && text != nullptr ? text : "";
}

TiffPage page_at(TiffHandle& tiff, std::uint64_t directory, std::uint64_t file_bytes) {
  TiffPage page;
  tiff.forget_error();
  if (TIFFSetSubDirectory(tiff.get(), directory) == 0) {
    page.problem = "has a damaged directory";
    if (!tiff.error().empty()) page.problem += " (" + tiff.error() + ")";
  } else {
    page = describe_page(tiff.get());
    if (page.problem.empty() && !pixels_inside(tiff.get(), page, file_bytes)) {
      page.problem = "lies partly beyond the end of the file";
    }
  }
  page.directory = directory;
  return page;
}

}  // namespace

TiffIndex index_tiff(const std::filesystem::path& file) {
  const auto chain = chain_with_a_page(file, most_pages);
  auto tiff = opened(file);
  TiffIndex index;
  index.broken = chain.broken;
  index.pages.reserve(chain.directories.size());
  for (const auto directory : chain.directories) {
    index.pages.push_back(page_at(tiff, directory, chain.file_bytes));
    if (index.pages.size() == 1) index.description = description_of(tiff.get());
  }
  return index;
}

std::string first_description(const std::filesystem::path& file) {
  const auto chain = chain_with_a_page(file, 1);
  auto tiff = opened(file);
  if (TIFFSetSubDirectory(tiff.get(), chain.directories.front()) == 0) return {};
  return description_of(tiff.get());
}

bool has_several_pages(const std::filesystem::path& file) {
  return chain_with_a_page(file, 2).directories.size() > 1;
}

}  // namespace wavefount
