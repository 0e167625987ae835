#pragma once

#include <string>
#include <string_view>

namespace wavefount {

bool is_utf8(std::string_view text);

/// The text itself where it is UTF-8; else its bytes taken as Latin-1, so that it can be written.
std::string as_utf8(std::string_view text);

/// At most `letters` letters in quotes, for a message about something a file says.
std::string in_quotes(std::string_view text, std::size_t letters = 40);

}  // namespace wavefount
