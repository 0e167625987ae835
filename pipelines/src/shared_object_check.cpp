#include "shared_object_check.h"

#include <elf.h>

#include <cstring>
#include <fstream>
#include <vector>

namespace wavefount {
namespace {

bool is_elf_of_this_machine(const Elf64_Ehdr& header) {
  return std::memcmp(header.e_ident, ELFMAG, SELFMAG) == 0 &&
         header.e_ident[EI_CLASS] == ELFCLASS64 && header.e_ident[EI_DATA] == ELFDATA2LSB &&
         header.e_phentsize == sizeof(Elf64_Phdr);
}

bool lies_within(std::uint64_t offset, std::uint64_t length, std::uint64_t size) {
  return offset <= size && length <= size - offset;
}

}  // namespace

std::optional<std::string> fault_of_shared_object(const std::filesystem::path& file) {
  std::error_code error;
  if (!std::filesystem::is_regular_file(file, error)) return "it is not a regular file";
  const std::uint64_t size = std::filesystem::file_size(file, error);
  if (error) return "its size cannot be read";
  if (size == 0) return "it is empty";
  std::ifstream in(file, std::ios::binary);
  Elf64_Ehdr header{};
  if (!in.read(reinterpret_cast<char*>(&header), sizeof header) || !is_elf_of_this_machine(header))
    return "it is not a shared library for this machine";
  if (header.e_type != ET_DYN) return "it is not a shared library";
  const std::uint64_t table = std::uint64_t{header.e_phnum} * sizeof(Elf64_Phdr);
  // The sections' table stands last: a library that lost its tail lost that first.
  const std::uint64_t sections = std::uint64_t{header.e_shnum} * header.e_shentsize;
  if (!lies_within(header.e_phoff, table, size) || !lies_within(header.e_shoff, sections, size))
    return "it was cut short";
  std::vector<Elf64_Phdr> segments(header.e_phnum);
  in.seekg(static_cast<std::streamoff>(header.e_phoff));
  if (!in.read(reinterpret_cast<char*>(segments.data()), static_cast<std::streamsize>(table)))
    return "it was cut short";
  for (const auto& segment : segments) {
    if (segment.p_type == PT_LOAD && !lies_within(segment.p_offset, segment.p_filesz, size))
      return "it was cut short";
  }
  return std::nullopt;
}

}  // namespace wavefount
