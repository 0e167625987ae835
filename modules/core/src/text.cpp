#include "wavefount/core/text.h"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>

namespace wavefount {
namespace {

bool is_digit(char c) {
  return c >= '0' && c <= '9';
}

std::string_view without_space(std::string_view text) {
  constexpr std::string_view space = " \t\r\n\f\v";
  const auto first = text.find_first_not_of(space);
  if (first == std::string_view::npos) return {};
  return text.substr(first, text.find_last_not_of(space) - first + 1);
}

template <class Number>
std::optional<Number> parse_whole(std::string_view text) {
  text = without_space(text);
  if (text.starts_with('+')) text.remove_prefix(1);
  Number value{};
  const auto* end = text.data() + text.size();
  const auto [stop, error] = std::from_chars(text.data(), end, value);
  if (error != std::errc() || stop != end || text.empty()) return std::nullopt;
  return value;
}

std::string_view digit_run(std::string_view text) {
  std::size_t length = 0;
  while (length < text.size() && is_digit(text[length])) ++length;
  return text.substr(0, length);
}

/// Compares two runs of digits as numbers of any length: negative, zero or positive.
int compare_runs(std::string_view left, std::string_view right) {
  const auto skip_zeros = [](std::string_view run) {
    const auto first = run.find_first_not_of('0');
    return first == std::string_view::npos ? std::string_view() : run.substr(first);
  };
  left = skip_zeros(left);
  right = skip_zeros(right);
  if (left.size() != right.size()) return left.size() < right.size() ? -1 : 1;
  return left.compare(right);
}

/// Length in bytes of the well-formed UTF-8 sequence at the start (The Unicode Standard 15,
/// table 3-7), 0 if there is none.
std::size_t utf8_sequence(std::string_view text) {
  const auto byte = [&](std::size_t i) { return static_cast<unsigned char>(text[i]); };
  const unsigned char lead = byte(0);
  if (lead < 0x80) return 1;
  const std::size_t length = lead < 0xC2    ? 0
                             : lead < 0xE0  ? 2
                             : lead < 0xF0  ? 3
                             : lead <= 0xF4 ? 4
                                            : 0;
  if (length == 0 || text.size() < length) return 0;
  const unsigned char lowest = lead == 0xE0 ? 0xA0 : lead == 0xF0 ? 0x90 : 0x80;
  const unsigned char highest = lead == 0xED ? 0x9F : lead == 0xF4 ? 0x8F : 0xBF;
  if (byte(1) < lowest || byte(1) > highest) return 0;
  for (std::size_t i = 2; i < length; ++i)
    if (byte(i) < 0x80 || byte(i) > 0xBF) return 0;
  return length;
}

}  // namespace

std::string number_text(double value) {
  if (!std::isfinite(value)) return {};
  if (value == 0) return "0";
  std::array<char, 32> buffer{};
  const auto [end, error] = std::to_chars(buffer.data(), buffer.data() + buffer.size(), value);
  return {buffer.data(), end};
}

std::string rounded_text(double value, int digits) {
  if (!std::isfinite(value)) return "unknown";
  std::array<char, 64> buffer{};
  const auto [end, error] = std::to_chars(buffer.data(), buffer.data() + buffer.size(), value,
                                          std::chars_format::general, digits);
  return {buffer.data(), end};
}

std::optional<double> parse_number(std::string_view text) {
  const auto value = parse_whole<double>(text);
  if (value && !std::isfinite(*value)) return std::nullopt;
  return value;
}

std::optional<long long> parse_integer(std::string_view text) {
  return parse_whole<long long>(text);
}

std::string trimmed(std::string_view text) {
  return std::string(without_space(text));
}

std::string lower_case(std::string_view text) {
  std::string lower(text);
  for (char& c : lower) {
    if (c >= 'A' && c <= 'Z') c = static_cast<char>(c - 'A' + 'a');
  }
  return lower;
}

std::vector<std::string> split(std::string_view text, char separator) {
  std::vector<std::string> parts;
  for (;;) {
    const auto at = text.find(separator);
    parts.emplace_back(text.substr(0, at));
    if (at == std::string_view::npos) return parts;
    text.remove_prefix(at + 1);
  }
}

std::string joined(const std::vector<std::string>& parts, std::string_view separator) {
  std::string text;
  for (const auto& part : parts) {
    if (&part != &parts.front()) text += separator;
    text += part;
  }
  return text;
}

std::string valid_utf8(std::string_view text) {
  std::string valid;
  valid.reserve(text.size());
  while (!text.empty()) {
    const auto length = utf8_sequence(text);
    valid += length > 0 ? text.substr(0, length) : "\xEF\xBF\xBD";
    text.remove_prefix(length > 0 ? length : 1);
  }
  return valid;
}

bool natural_less(std::string_view left, std::string_view right) {
  const auto whole_left = left;
  const auto whole_right = right;
  while (!left.empty() && !right.empty()) {
    if (is_digit(left.front()) && is_digit(right.front())) {
      const auto left_run = digit_run(left);
      const auto right_run = digit_run(right);
      if (const int order = compare_runs(left_run, right_run); order != 0) return order < 0;
      left.remove_prefix(left_run.size());
      right.remove_prefix(right_run.size());
      continue;
    }
    if (left.front() != right.front()) {
      return static_cast<unsigned char>(left.front()) < static_cast<unsigned char>(right.front());
    }
    left.remove_prefix(1);
    right.remove_prefix(1);
  }
  if (left.empty() != right.empty()) return left.empty();
  return whole_left < whole_right;
}

}  // namespace wavefount
