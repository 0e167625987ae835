#include "utf8.h"

#include <cstdint>

namespace wavefount {
namespace {

/// Bytes of the letter that starts the text, 0 where none does (RFC 3629: shortest form, no
/// surrogates, up to U+10FFFF).
std::size_t letter_length(std::string_view text) {
  const auto byte = [&](std::size_t i) { return static_cast<unsigned char>(text[i]); };
  const unsigned char lead = byte(0);
  if (lead < 0x80) return 1;
  const std::size_t length = lead >= 0xF0 ? 4 : lead >= 0xE0 ? 3 : 2;
  if (lead < 0xC2 || lead > 0xF4 || text.size() < length) return 0;
  for (std::size_t i = 1; i < length; ++i) {
    if ((byte(i) & 0xC0U) != 0x80U) return 0;
  }
  const unsigned char second = byte(1);
  const bool too_long = (lead == 0xE0 && second < 0xA0) || (lead == 0xF0 && second < 0x90);
  const bool no_letter = (lead == 0xED && second > 0x9F) || (lead == 0xF4 && second > 0x8F);
  return too_long || no_letter ? 0 : length;
}

}  // namespace

bool is_utf8(std::string_view text) {
  while (!text.empty()) {
    const std::size_t length = letter_length(text);
    if (length == 0) return false;
    text.remove_prefix(length);
  }
  return true;
}

std::string as_utf8(std::string_view text) {
  if (is_utf8(text)) return std::string(text);
  std::string converted;
  for (const char letter : text) {
    const auto byte = static_cast<unsigned char>(letter);
    if (byte < 0x80) {
      converted += letter;
    } else {
      converted += static_cast<char>(0xC0U | byte >> 6U);
      converted += static_cast<char>(0x80U | (byte & 0x3FU));
    }
  }
  return converted;
}

std::string in_quotes(std::string_view text, std::size_t letters) {
  const std::string whole = as_utf8(text);
  std::string_view rest = whole;
  std::string shown;
  for (std::size_t i = 0; i < letters && !rest.empty(); ++i) {
    const std::size_t length = letter_length(rest);
    const bool control = static_cast<unsigned char>(rest.front()) < 0x20;
    shown += control ? " " : rest.substr(0, length);
    rest.remove_prefix(length);
  }
  return "\"" + shown + (rest.empty() ? "" : "…") + "\"";
}

}  // namespace wavefount
