extern "C" __attribute__((visibility("default"))) void* itkLoad() {
  return nullptr;
}
