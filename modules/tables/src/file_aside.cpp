#include "wavefount/tables/file_aside.h"

#include <cerrno>
#include <cstring>
#include <string>
#include <system_error>
#include <utility>

#include "wavefount/core/problem.h"

namespace wavefount {

FileAside::FileAside(std::filesystem::path place)
    : place_(std::move(place)), aside_(aside_of(place_)), file_(std::fopen(aside_.c_str(), "wbe")) {
  if (!file_) refuse();
}

FileAside::~FileAside() {
  if (!file_) return;
  file_.reset();
  std::error_code ignored;
  std::filesystem::remove(aside_, ignored);
}

void FileAside::write(std::string_view bytes) {
  if (std::fwrite(bytes.data(), 1, bytes.size(), file_.get()) != bytes.size()) refuse();
}

void FileAside::commit() {
  if (std::fflush(file_.get()) != 0) refuse();
  std::error_code error;
  std::filesystem::rename(aside_, place_, error);
  if (error) {
    errno = error.value();
    refuse();
  }
  file_.reset();
}

void FileAside::refuse() const {
  throw Problem("The file " + place_.string() + " cannot be written: " + std::strerror(errno) +
                "; free space there or choose another --out.");
}

std::filesystem::path aside_of(const std::filesystem::path& place) {
  auto aside = place;
  aside += ".part";
  return aside;
}

}  // namespace wavefount
