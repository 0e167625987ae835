#pragma once

#include <cstdio>
#include <filesystem>
#include <memory>
#include <string_view>

namespace wavefount {

/// A file written beside its place under another name and renamed when complete, so that a reader
/// never meets half of it. Removed again unless committed.
class FileAside {
 public:
  /// Throws Problem when the file cannot be made.
  explicit FileAside(std::filesystem::path place);
  ~FileAside();
  FileAside(const FileAside&) = delete;
  FileAside& operator=(const FileAside&) = delete;

  /// Throws Problem when the disk is full.
  void write(std::string_view bytes);
  /// Puts the file in its place. Throws Problem when the disk is full.
  void commit();

 private:
  [[noreturn]] void refuse() const;

  struct Closer {
    void operator()(std::FILE* file) const { std::fclose(file); }
  };
  std::filesystem::path place_, aside_;
  std::unique_ptr<std::FILE, Closer> file_;
};

/// Where a file is written until it is complete: its own name and `.part`.
std::filesystem::path aside_of(const std::filesystem::path& place);

}  // namespace wavefount
