#include <stdexcept>

#include "wavefount/core/version.h"

extern "C" {
__attribute__((visibility("default"))) extern const char wavefount_abi[];
const char wavefount_abi[] = WAVEFOUNT_ABI;
}

extern "C" __attribute__((visibility("default"))) void* itkLoad() {
  throw std::runtime_error("no licence for Mondays");
}
