#include "wavefount/synthetic/camera_noise.h"

#include <algorithm>
#include <cmath>

#include "wavefount/synthetic/counter_random.h"

namespace wavefount {
namespace {

// Below this mean the normal approximation of a Poisson count is visibly wrong.
constexpr double few_electrons = 20;

/// Poisson count by walking up its distribution function.
double poisson_from(double mean, double share) {
  double term = std::exp(-mean);
  double sum = term;
  int count = 0;
  while (share > sum && count < 200) {
    ++count;
    term *= mean / count;
    sum += term;
  }
  return count;
}

class Camera {
 public:
  Camera(const SceneCamera& camera, std::uint64_t seed, int frame)
      : camera_(camera),
        random_(seed, 2 * static_cast<std::uint64_t>(frame) + 1),
        read_variance_(camera.read_noise_electrons * camera.read_noise_electrons),
        top_(std::exp2(camera.bit_depth) - 1) {}

  float counts(float light, std::uint64_t pixel) const {
    const double mean =
        std::max(0.0, static_cast<double>(light) * camera_.gain_electrons_per_count);
    const double electrons = mean < few_electrons ? few(mean, pixel) : many(mean, pixel);
    const double value =
        std::floor(electrons / camera_.gain_electrons_per_count + camera_.dark_offset_counts + 0.5);
    return static_cast<float>(std::clamp(value, 0.0, top_));
  }

 private:
  double few(double mean, std::uint64_t pixel) const {
    return poisson_from(mean, random_.uniform(2 * pixel)) +
           camera_.read_noise_electrons * random_.normal(2 * pixel + 1);
  }
  /// Shot and read noise as one normal number, bent to the skewness of the sum (Cornish & Fisher
  /// 1938).
  double many(double mean, std::uint64_t pixel) const {
    const double z = random_.normal(2 * pixel);
    const double variance = mean + read_variance_;
    return mean + std::sqrt(variance) * z + mean / variance * (z * z - 1) / 6;
  }

  SceneCamera camera_;
  CounterRandom random_;
  double read_variance_;
  double top_;
};

}  // namespace

void expose(Image& light, const SceneCamera& settings, std::uint64_t seed, int frame) {
  const Camera camera(settings, seed, frame);
  float* pixels = light.GetBufferPointer();
  const auto count = static_cast<std::uint64_t>(image_width(light)) *
                     static_cast<std::uint64_t>(image_height(light));
  for (std::uint64_t i = 0; i < count; ++i) pixels[i] = camera.counts(pixels[i], i);
}

}  // namespace wavefount
