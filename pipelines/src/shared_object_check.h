#pragma once

#include <filesystem>
#include <optional>
#include <string>

namespace wavefount {

/// Why a file cannot be a shared library for this machine, or empty when nothing speaks against it.
/// Checked before dlopen, since the dynamic loader maps segments without looking whether they lie
/// inside the file and dies on a library that was cut short.
std::optional<std::string> fault_of_shared_object(const std::filesystem::path& file);

}  // namespace wavefount
