#include "wavefount/acquisition/checksum.h"

#include <xxhash.h>

#include <fstream>
#include <memory>
#include <vector>

#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

struct FreeState {
  void operator()(XXH3_state_t* state) const { XXH3_freeState(state); }
};

std::string hexadecimal(XXH128_hash_t hash) {
  XXH128_canonical_t bytes{};
  XXH128_canonicalFromHash(&bytes, hash);
  constexpr const char* digits = "0123456789abcdef";
  std::string text;
  for (const unsigned char byte : bytes.digest) {
    text += digits[byte >> 4U];
    text += digits[byte & 15U];
  }
  return text;
}

}  // namespace

std::string checksum(const std::filesystem::path& file) {
  std::ifstream stream(file, std::ios::binary);
  const std::unique_ptr<XXH3_state_t, FreeState> state(XXH3_createState());
  XXH3_128bits_reset(state.get());
  std::vector<char> block(std::size_t{1} << 20U);
  while (stream) {
    stream.read(block.data(), static_cast<std::streamsize>(block.size()));
    XXH3_128bits_update(state.get(), block.data(), static_cast<std::size_t>(stream.gcount()));
  }
  if (!stream.eof()) {
    throw Problem("The file " + file.string() +
                  " cannot be read; check that it is there and may be read.");
  }
  return hexadecimal(XXH3_128bits_digest(state.get()));
}

}  // namespace wavefount
