#pragma once

#include <string>
#include <vector>

namespace wavefount {

enum class Severity { note, warning };

/// One sentence about an acquisition, for `record.json` and the `acquisitions` table.
struct Message {
  Severity severity = Severity::note;
  std::string text;
};

/// The messages of one acquisition, in the order they were given; a repeated text is kept once.
class Messages {
 public:
  void note(const std::string& text);
  void warn(const std::string& text);
  const std::vector<Message>& all() const { return messages_; }
  /// The warnings joined by a space, for a table cell.
  std::string summary() const;

 private:
  void add(Severity severity, const std::string& text);

  std::vector<Message> messages_;
};

}  // namespace wavefount
