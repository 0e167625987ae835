// Decodes every page of TIFF files with libtiff on a number of threads and does nothing else: what
// reading alone costs, to hold a run against.
//   decode_only THREADS FILE...
#include <tiffio.h>

#include <atomic>
#include <chrono>
#include <cstdint>
#include <cstdio>
#include <cstdlib>
#include <string>
#include <thread>
#include <vector>

namespace {

/// Offsets of all directories, so that threads can go straight to their pages.
std::vector<std::uint64_t> directories_of(const char* path) {
  std::vector<std::uint64_t> offsets;
  TIFF* tiff = TIFFOpen(path, "rm");
  if (tiff == nullptr) return offsets;
  do {
    offsets.push_back(TIFFCurrentDirOffset(tiff));
  } while (TIFFReadDirectory(tiff) == 1);
  TIFFClose(tiff);
  return offsets;
}

std::uint64_t decode_page(TIFF* tiff, std::uint64_t offset, std::vector<std::uint8_t>& buffer) {
  TIFFSetSubDirectory(tiff, offset);
  std::uint32_t width = 0;
  std::uint32_t height = 0;
  TIFFGetField(tiff, TIFFTAG_IMAGEWIDTH, &width);
  TIFFGetField(tiff, TIFFTAG_IMAGELENGTH, &height);
  const bool tiled = TIFFIsTiled(tiff) != 0;
  const auto pieces = tiled ? TIFFNumberOfTiles(tiff) : TIFFNumberOfStrips(tiff);
  const auto size = tiled ? TIFFTileSize(tiff) : TIFFStripSize(tiff);
  buffer.resize(static_cast<std::size_t>(size));
  for (std::uint32_t piece = 0; piece < pieces; ++piece) {
    if (tiled)
      TIFFReadEncodedTile(tiff, piece, buffer.data(), size);
    else
      TIFFReadEncodedStrip(tiff, piece, buffer.data(), size);
  }
  return std::uint64_t{width} * height;
}

std::uint64_t decode_file(const char* path, int threads) {
  const auto offsets = directories_of(path);
  std::atomic<std::size_t> next{0};
  std::atomic<std::uint64_t> pixels{0};
  const auto work = [&] {
    TIFF* tiff = TIFFOpen(path, "rm");
    if (tiff == nullptr) return;
    std::vector<std::uint8_t> buffer;
    for (std::size_t page = next++; page < offsets.size(); page = next++)
      pixels += decode_page(tiff, offsets[page], buffer);
    TIFFClose(tiff);
  };
  std::vector<std::thread> workers;
  for (int i = 0; i < threads; ++i) workers.emplace_back(work);
  for (auto& worker : workers) worker.join();
  return pixels;
}

}  // namespace

int main(int count, char** words) {
  if (count < 3) {
    std::fprintf(stderr, "usage: decode_only THREADS FILE...\n");
    return 2;
  }
  TIFFSetWarningHandler(nullptr);
  const int threads = std::atoi(words[1]);
  const auto start = std::chrono::steady_clock::now();
  std::uint64_t pixels = 0;
  for (int i = 2; i < count; ++i) pixels += decode_file(words[i], threads);
  const std::chrono::duration<double> time = std::chrono::steady_clock::now() - start;
  std::printf("%.3f seconds, %.1f megapixels\n", time.count(), static_cast<double>(pixels) * 1e-6);
  return 0;
}
