#pragma once

#include <filesystem>
#include <string>
#include <vector>

namespace wavefount {

/// The output folder of a run, locked against a second run, where results appear only complete.
class RunFolder {
 public:
  /// Makes the folder, locks it and clears what an interrupted run left aside. Throws Problem when
  /// it cannot be made or written, lies inside `input` (or holds it), or another run holds the
  /// lock.
  RunFolder(const std::filesystem::path& output, const std::filesystem::path& input);
  ~RunFolder();
  RunFolder(const RunFolder&) = delete;
  RunFolder& operator=(const RunFolder&) = delete;

  const std::filesystem::path& path() const { return output_; }
  /// A new empty folder to write a film's results into, on the same file system.
  std::filesystem::path aside(const std::string& film, const std::string& purpose) const;
  /// Moves finished results from `aside` to the folder of `acquisition`. Its record.json is moved
  /// last: a folder without one holds no result.
  void publish(const std::filesystem::path& aside, const std::string& acquisition) const;
  /// Takes away an acquisition's earlier results, but not those of acquisitions nested in it.
  void retract(const std::string& acquisition) const;
  std::filesystem::path folder_of(const std::string& acquisition) const;

 private:
  void lock();

  std::filesystem::path output_;
  int lock_ = -1;
};

/// Name of the file that marks a complete result.
inline constexpr const char* record_file_name = "record.json";

}  // namespace wavefount
