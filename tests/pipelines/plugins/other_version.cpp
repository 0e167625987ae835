#include <cstdlib>

extern "C" {
__attribute__((visibility("default"))) extern const char wavefount_abi[];
const char wavefount_abi[] = "wavefount 0.0.0 itk 4.0 gcc 1.0";
}

// Must never be called.
extern "C" __attribute__((visibility("default"))) void* itkLoad() {
  std::abort();
}
