#include "wavefount/core/reduced_film.h"

#include <fcntl.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cmath>
#include <cstring>
#include <vector>

#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

[[noreturn]] void refuse(const std::filesystem::path& file, const std::string& what) {
  throw Problem("The work file " + file.string() + " " + what + ": " + std::strerror(errno) +
                "; free space there or choose another --out.");
}

}  // namespace

ReducedFilm::ReducedFilm(const std::filesystem::path& file, int frames, int factor, int left,
                         int top, int width, int height, double lowest, double highest)
    : file_(file),
      frames_(frames),
      factor_(factor),
      left_(left),
      top_(top),
      width_(width),
      height_(height),
      lowest_(lowest),
      counts_per_step_(std::max(highest - lowest, 1e-6) / 65535) {
  descriptor_ = ::open(file.c_str(), O_RDWR | O_CREAT | O_TRUNC | O_CLOEXEC, 0600);
  if (descriptor_ < 0) refuse(file_, "cannot be made");
}

ReducedFilm::~ReducedFilm() {
  ::close(descriptor_);
  ::unlink(file_.c_str());
}

void ReducedFilm::write(int frame, const Image& image) const {
  const std::size_t count = static_cast<std::size_t>(width_) * static_cast<std::size_t>(height_);
  std::vector<std::uint16_t> steps(count);
  const float* pixels = image.GetBufferPointer();
  const float scale = static_cast<float>(1 / counts_per_step_);
  const float low = static_cast<float>(lowest_);
  for (std::size_t i = 0; i < count; ++i) {
    const float step = (pixels[i] - low) * scale + 0.5F;
    steps[i] = static_cast<std::uint16_t>(std::min(std::max(step, 0.0F), 65535.0F));
  }
  const auto* bytes = reinterpret_cast<const char*>(steps.data());
  const std::size_t size = count * sizeof(std::uint16_t);
  const off_t start = static_cast<off_t>(size) * frame;
  for (std::size_t done = 0; done < size;) {
    const auto wrote =
        ::pwrite(descriptor_, bytes + done, size - done, start + static_cast<off_t>(done));
    if (wrote < 0 && errno == EINTR) continue;
    if (wrote <= 0) refuse(file_, "cannot be written");
    done += static_cast<std::size_t>(wrote);
  }
}

ImagePointer ReducedFilm::read(int frame) const {
  const std::size_t count = static_cast<std::size_t>(width_) * static_cast<std::size_t>(height_);
  std::vector<std::uint16_t> steps(count, 0);
  auto* bytes = reinterpret_cast<char*>(steps.data());
  const std::size_t size = count * sizeof(std::uint16_t);
  const off_t start = static_cast<off_t>(size) * frame;
  for (std::size_t done = 0; done < size;) {
    const auto got =
        ::pread(descriptor_, bytes + done, size - done, start + static_cast<off_t>(done));
    if (got < 0 && errno == EINTR) continue;
    if (got < 0) refuse(file_, "cannot be read");
    if (got == 0) break;
    done += static_cast<std::size_t>(got);
  }
  auto image = make_image(width_, height_);
  float* pixels = image->GetBufferPointer();
  const auto scale = static_cast<float>(counts_per_step_);
  const auto low = static_cast<float>(lowest_);
  for (std::size_t i = 0; i < count; ++i) pixels[i] = low + static_cast<float>(steps[i]) * scale;
  return image;
}

}  // namespace wavefount
