#pragma once

#include <map>
#include <memory>
#include <string>
#include <utility>
#include <vector>

#include "wavefount/core/problem.h"

namespace wavefount {

/// What steps hand to one another, keyed by the record's name (`T::record_name`), since plug-ins
/// are opened with RTLD_LOCAL and share no type information but that of core. Not thread-safe for
/// writing; any number of threads may read.
class RecordStore {
 public:
  template <class T>
  void put(T record) {
    records_[T::record_name] = std::make_shared<T>(std::move(record));
  }

  template <class T>
  void share(std::shared_ptr<T> record) {
    records_[T::record_name] = std::move(record);
  }

  template <class T>
  bool has() const {
    return records_.contains(T::record_name);
  }

  /// The record, to read. Throws Problem when no step has made it.
  template <class T>
  const T& get() const {
    return *static_cast<const T*>(find(T::record_name));
  }

  /// The record, to complete in place. Throws Problem when no step has made it.
  template <class T>
  T& edit() {
    return *static_cast<T*>(find(T::record_name));
  }

  /// The record or nullptr.
  template <class T>
  const T* peek() const {
    const auto at = records_.find(T::record_name);
    return at == records_.end() ? nullptr : static_cast<const T*>(at->second.get());
  }

  /// The record, or an empty one where no step has made it.
  template <class T>
  const T& get_or_empty() const {
    static const T empty{};
    const auto* record = peek<T>();
    return record ? *record : empty;
  }

  template <class T>
  void drop() {
    records_.erase(T::record_name);
  }

  std::vector<std::string> names() const;

 private:
  void* find(const std::string& name) const;

  std::map<std::string, std::shared_ptr<void>> records_;
};

}  // namespace wavefount
