#include "wavefount/core/record_store.h"

namespace wavefount {

std::vector<std::string> RecordStore::names() const {
  std::vector<std::string> names;
  for (const auto& [name, record] : records_) names.push_back(name);
  return names;
}

void* RecordStore::find(const std::string& name) const {
  const auto at = records_.find(name);
  if (at == records_.end()) {
    throw Problem("A step asked for the record '" + name +
                  "', which no earlier step of the pipeline has made.");
  }
  return at->second.get();
}

}  // namespace wavefount
