#include "wavefount/core/version.h"

extern "C" {
__attribute__((visibility("default"))) extern const char wavefount_abi[];
const char wavefount_abi[] = WAVEFOUNT_ABI;
}

void* a_function_that_nobody_has();

extern "C" __attribute__((visibility("default"))) void* itkLoad() {
  return a_function_that_nobody_has();
}
