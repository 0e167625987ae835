#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace wavefount {

/// Shortest text that reads back as the same double, `.` as decimal mark whatever the locale; empty
/// for a value that is not finite.
std::string number_text(double value);
/// At most `digits` significant digits, for messages.
std::string rounded_text(double value, int digits = 4);
/// The number that the whole text is (white space around it allowed), whatever the locale.
std::optional<double> parse_number(std::string_view text);
std::optional<long long> parse_integer(std::string_view text);
std::string trimmed(std::string_view text);
std::string lower_case(std::string_view text);
std::vector<std::string> split(std::string_view text, char separator);
std::string joined(const std::vector<std::string>& parts, std::string_view separator);
/// The text with every byte that is not part of valid UTF-8 replaced by U+FFFD: file names may hold
/// any bytes, tables and pictures may not.
std::string valid_utf8(std::string_view text);
/// Natural order: digit runs compare as numbers ("film 2" before "film 10").
bool natural_less(std::string_view left, std::string_view right);

}  // namespace wavefount
