#include "wavefount/core/version.h"

extern "C" {
__attribute__((visibility("default"))) extern const char wavefount_abi[];
const char wavefount_abi[] = WAVEFOUNT_ABI;
}
