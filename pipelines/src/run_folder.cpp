#include "run_folder.h"

#include <fcntl.h>
#include <sys/file.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <fstream>

#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

namespace fs = std::filesystem;

/// Everything unfinished lies here; a dot keeps it out of a file manager's first look.
constexpr const char* aside_name = ".unfinished";
constexpr const char* lock_name = ".lock";

bool lies_in(const fs::path& inner, const fs::path& outer) {
  const auto relative = inner.lexically_relative(outer);
  return !relative.empty() && *relative.begin() != "..";
}

void refuse_overlap(const fs::path& output, const fs::path& input) {
  const auto out = fs::weakly_canonical(output);
  const auto in = fs::weakly_canonical(input);
  if (lies_in(out, in))
    throw Problem("The output folder " + output.string() + " lies inside the films' folder " +
                  input.string() + "; choose an --out outside it.");
  if (lies_in(in, out))
    throw Problem("The films' folder " + input.string() + " lies inside the output folder " +
                  output.string() + "; choose another --out.");
}

void try_writing(const fs::path& folder) {
  const auto probe = folder / ".write-test";
  std::ofstream out(probe);
  if (!(out << "wavefount\n" << std::flush))
    throw Problem("The output folder " + folder.string() +
                  " cannot be written (permissions, or the disk is full); choose another --out.");
  out.close();
  fs::remove(probe);
}

}  // namespace

RunFolder::RunFolder(const fs::path& output, const fs::path& input) : output_(output) {
  refuse_overlap(output, input);
  std::error_code error;
  fs::create_directories(output_, error);
  if (error || !fs::is_directory(output_))
    throw Problem("The output folder " + output_.string() + " cannot be made (" + error.message() +
                  "); choose another --out.");
  try_writing(output_);
  lock();
  fs::remove_all(output_ / aside_name, error);
}

RunFolder::~RunFolder() {
  std::error_code error;
  fs::remove_all(output_ / aside_name, error);
  ::close(lock_);
}

void RunFolder::lock() {
  const auto file = output_ / lock_name;
  lock_ = ::open(file.c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0644);
  if (lock_ < 0) throw Problem("The lock file " + file.string() + " cannot be made.");
  if (::flock(lock_, LOCK_EX | LOCK_NB) == 0) return;
  ::close(lock_);
  throw Problem("Another run is writing into " + output_.string() +
                "; wait until it ends, or choose another --out.");
}

fs::path RunFolder::aside(const std::string& film, const std::string& purpose) const {
  auto folder = output_ / aside_name / purpose / film;
  std::error_code error;
  fs::create_directories(folder, error);
  if (error)
    throw Problem("The folder " + folder.string() + " cannot be made (" + error.message() + ").");
  return folder;
}

fs::path RunFolder::folder_of(const std::string& acquisition) const {
  return output_ / acquisition;
}

void RunFolder::retract(const std::string& acquisition) const {
  const auto folder = folder_of(acquisition);
  std::error_code error;
  // The record first: from then on nothing here is taken for a result.
  fs::remove(folder / record_file_name, error);
  if (!fs::is_directory(folder, error)) return;
  for (const auto& entry : fs::directory_iterator(folder)) {
    if (entry.is_regular_file()) fs::remove(entry.path(), error);
  }
}

void RunFolder::publish(const fs::path& aside, const std::string& acquisition) const {
  retract(acquisition);
  const auto target = folder_of(acquisition);
  fs::create_directories(target);
  for (const auto& entry : fs::directory_iterator(aside)) {
    if (entry.is_regular_file() && entry.path().filename() != record_file_name)
      fs::rename(entry.path(), target / entry.path().filename());
  }
  fs::rename(aside / record_file_name, target / record_file_name);
}

}  // namespace wavefount
