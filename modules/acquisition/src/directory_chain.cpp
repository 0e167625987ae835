#include "directory_chain.h"

#include <algorithm>
#include <array>
#include <fstream>
#include <optional>
#include <unordered_set>

#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

/// A TIFF's bytes as numbers in the file's own byte order.
class TiffBytes {
 public:
  explicit TiffBytes(const std::filesystem::path& file) : stream_(file, std::ios::binary) {
    if (!stream_ || !std::filesystem::is_regular_file(file)) {
      throw Problem("The file " + file.filename().string() +
                    " cannot be opened; check that it may be read.");
    }
    size_ = std::filesystem::file_size(file);
    if (size_ == 0) {
      throw Problem("The file " + file.filename().string() +
                    " is empty (zero bytes); copy it again from where it was recorded.");
    }
    std::array<char, 2> order{};
    if (!stream_.read(order.data(), order.size())) refuse(file);
    if (order[0] != order[1] || (order[0] != 'I' && order[0] != 'M')) refuse(file);
    big_endian_ = order[0] == 'M';
    const auto magic = number(2, 2);
    if (magic != 42 && magic != 43) refuse(file);
    big_tiff_ = magic == 43;
  }

  std::uint64_t size() const { return size_; }
  std::optional<std::uint64_t> first() { return big_tiff_ ? number(8, 8) : number(4, 4); }

  /// Link to the next directory; empty when this one does not lie inside the file.
  std::optional<std::uint64_t> next(std::uint64_t directory) {
    const std::uint64_t count_bytes = big_tiff_ ? 8 : 2, entry_bytes = big_tiff_ ? 20 : 12;
    constexpr std::uint64_t most_entries = 65535;
    const auto entries = number(directory, count_bytes);
    if (!entries || *entries == 0 || *entries > most_entries) return std::nullopt;
    return number(directory + count_bytes + *entries * entry_bytes, big_tiff_ ? 8 : 4);
  }

 private:
  [[noreturn]] static void refuse(const std::filesystem::path& file) {
    throw Problem("The file " + file.filename().string() +
                  " is not a TIFF, whatever its name says; export the film again as TIFF.");
  }

  std::optional<std::uint64_t> number(std::uint64_t at, std::uint64_t bytes) {
    if (at > size_ || bytes > size_ - at) return std::nullopt;
    std::array<char, 8> raw{};
    stream_.clear();
    stream_.seekg(static_cast<std::streamoff>(at));
    if (!stream_.read(raw.data(), static_cast<std::streamsize>(bytes))) return std::nullopt;
    std::uint64_t value = 0;
    for (std::size_t i = 0; i < bytes; ++i) {
      const std::size_t from = big_endian_ ? i : bytes - 1 - i;
      value = value << 8U | static_cast<unsigned char>(raw[from]);
    }
    return value;
  }

  std::ifstream stream_;
  std::uint64_t size_ = 0;
  bool big_endian_ = false;
  bool big_tiff_ = false;
};

}  // namespace

DirectoryChain walk_directories(const std::filesystem::path& file, std::size_t most) {
  TiffBytes bytes(file);
  DirectoryChain chain;
  chain.file_bytes = bytes.size();
  std::unordered_set<std::uint64_t> seen;
  auto directory = bytes.first();
  while (directory && *directory != 0 && chain.directories.size() < most) {
    if (!seen.insert(*directory).second) {
      chain.broken = "its directories run in a circle";
      return chain;
    }
    const auto next = bytes.next(*directory);
    if (!next) {
      chain.broken = "it is cut short";
      return chain;
    }
    chain.directories.push_back(*directory);
    directory = next;
  }
  if (!directory) chain.broken = "it is cut short";
  return chain;
}

}  // namespace wavefount
