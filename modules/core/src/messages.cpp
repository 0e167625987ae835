#include "wavefount/core/messages.h"

#include <algorithm>

namespace wavefount {

void Messages::note(const std::string& text) {
  add(Severity::note, text);
}

void Messages::warn(const std::string& text) {
  add(Severity::warning, text);
}

std::string Messages::summary() const {
  std::string summary;
  for (const auto& message : messages_) {
    if (message.severity != Severity::warning) continue;
    if (!summary.empty()) summary += ' ';
    summary += message.text;
  }
  return summary;
}

void Messages::add(Severity severity, const std::string& text) {
  const auto same = [&](const Message& message) { return message.text == text; };
  if (std::none_of(messages_.begin(), messages_.end(), same)) messages_.push_back({severity, text});
}

}  // namespace wavefount
