#include "simulated_film.h"

#include <algorithm>
#include <cmath>
#include <random>

namespace wavefount::simulated {

namespace {

constexpr double plateau = 500;  // counts

// Mean of a function over the exposure, by the midpoint rule.
double exposed(const std::function<double(double)>& f, double from, double exposure) {
  if (exposure <= 0) return f(from);
  double sum = 0;
  for (int i = 0; i < 40; ++i) sum += f(from + exposure * (i + 0.5) / 40);
  return sum / 40;
}

struct Cycle {
  double formed = 0, entry = 0;
};

std::vector<Cycle> cycles_of(const Scene& scene, std::mt19937_64& random) {
  std::uniform_real_distribution<double> uniform;
  std::vector<Cycle> cycles;
  double formed = -15 * uniform(random) - 2;
  while (formed < scene.length_min) {
    const double entry = formed + 20 + 10 * uniform(random);
    cycles.push_back({formed, entry});
    formed = entry + 6 + 5 * uniform(random);
  }
  return cycles;
}

double light_at(const Scene& scene, const std::vector<Cycle>& cycles, double time) {
  double light = scene.base_share;
  for (const auto& cycle : cycles) {
    if (time < cycle.formed) break;
    if (time < cycle.entry)
      light += scene.growth(time - cycle.formed);
    else
      light += scene.growth(cycle.entry - cycle.formed) * scene.release(time - cycle.entry);
    const double arrived = time - cycle.entry - 2;
    if (arrived > 0) light += scene.neighbour_share * arrived / 3 * std::exp(1 - arrived / 3);
  }
  return plateau * light * std::exp(-scene.bleaching_per_min * time);
}

std::vector<double> stamps_of(const Scene& scene, std::mt19937_64& random) {
  std::uniform_real_distribution<double> uniform;
  std::vector<double> times;
  for (double time = 0; time < scene.length_min; time += scene.interval_min) {
    if (!times.empty() && uniform(random) < scene.dropped_share) continue;
    times.push_back(
        time +
        (times.empty() ? 0 : scene.jitter_share * scene.interval_min * (uniform(random) - 0.5)));
  }
  return times;
}

void add_nucleus(const Scene& scene, Film& film, std::mt19937_64& random) {
  std::normal_distribution<double> normal;
  std::uniform_real_distribution<double> uniform;
  const auto cycles = cycles_of(scene, random);
  const auto& times = film.description.times_min;
  Nucleus nucleus;
  nucleus.id = static_cast<int>(film.nuclei.nuclei.size()) + 1;
  ApertureTrace trace;
  trace.radius_um = 10;
  for (std::size_t i = 0; i < times.size(); ++i) {
    const double clean =
        exposed([&](double t) { return light_at(scene, cycles, t); }, times[i], scene.exposure_min);
    const double sd = plateau / scene.signal_to_noise * std::sqrt(0.4 + 0.6 * clean / plateau);
    double seen = clean + sd * normal(random);
    if (uniform(random) < scene.bad_share) seen += plateau * (uniform(random) - 0.5);
    trace.frame.push_back(static_cast<int>(i));
    trace.time_min.push_back(times[i]);
    trace.signal.push_back(seen);
    trace.variance.push_back(std::pow(sd * scene.stated_share, 2));
    TracePoint point;
    point.frame = static_cast<int>(i);
    point.time_min = times[i];
    point.found = clean > (0.25 + scene.base_share) * plateau && uniform(random) > 0.03;
    point.x_px = point.y_px = 500;
    point.x_um = point.y_um = 250;
    point.brightness = seen;
    point.brightness_variance = sd * sd;
    point.radius_um = 10;
    point.cytoplasm = 300;
    nucleus.points.push_back(point);
  }
  for (const auto& cycle : cycles) {
    film.all_entries.push_back({nucleus.id, cycle.entry});
    if (cycle.entry > times.front() + 6 * scene.interval_min &&
        cycle.entry < times.back() - 4 * scene.interval_min)
      film.entries.push_back({nucleus.id, cycle.entry});
  }
  film.nuclei.nuclei.push_back(std::move(nucleus));
  film.traces.traces.push_back(std::move(trace));
}

}  // namespace

Film simulate(const Scene& scene, std::uint64_t seed) {
  std::mt19937_64 random(seed);
  Film film;
  film.description.width = film.description.height = 1000;
  film.description.pixel_um = 0.5;
  film.description.exposure_min = scene.exposure_min;
  film.description.times_min = stamps_of(scene, random);
  film.description.frames = static_cast<int>(film.description.times_min.size());
  for (int i = 0; i < scene.nuclei; ++i) add_nucleus(scene, film, random);
  return film;
}

Release disc_by_clouds(double tau_min) {
  // Concentration over the disc's area from all its points: a convolution of two discs' overlap,
  // with the Gaussian's weight: ∫ overlap(r) · G(r) 2πr dr / area, overlap of unit discs at r.
  std::vector<double> share;
  const auto at = [](double tau) {
    double sum = 0;
    constexpr int rings = 4000;
    const double reach = std::min(2.0, 12 * std::sqrt(tau));
    for (int i = 0; i < rings; ++i) {
      const double r = reach * (i + 0.5) / rings;
      const double overlap = (2 * std::acos(r / 2) - r / 2 * std::sqrt(4 - r * r)) / M_PI;
      sum +=
          overlap * std::exp(-r * r / (4 * tau)) / (4 * M_PI * tau) * 2 * M_PI * r * reach / rings;
    }
    return sum;
  };
  constexpr double step = 0.01;  // in log τ
  for (int i = 0; i < 1600; ++i) share.push_back(at(std::exp(-10 + step * i)));
  return [share, tau_min](double time) {
    if (time <= 0) return 1.0;
    const double place = (std::log(time / tau_min) + 10) / step;
    if (place <= 0) return 1 - (1 - share[0]) * std::sqrt(time / tau_min / std::exp(-10.0));
    const auto below = std::min(share.size() - 2, static_cast<std::size_t>(place));
    return share[below] + (place - static_cast<double>(below)) * (share[below + 1] - share[below]);
  };
}

Release gaussian_spread(double time_min) {
  return [=](double time) { return time <= 0 ? 1.0 : 1 / (1 + time / time_min); };
}

Release exponential_loss(double time_min) {
  return [=](double time) { return time <= 0 ? 1.0 : std::exp(-time / time_min); };
}

Release pores_then_clouds(double pores_min, double tau_min) {
  const auto cloud = disc_by_clouds(tau_min);
  return [=](double time) {
    if (time <= 0) return 1.0;
    double kept = std::exp(-time / pores_min);
    constexpr int parts = 60;
    for (int i = 0; i < parts; ++i) {
      const double since = time * (i + 0.5) / parts;
      kept += std::exp(-since / pores_min) / pores_min * cloud(time - since) * time / parts;
    }
    return kept;
  };
}

Release linear_leak(double time_min) {
  return [=](double time) { return std::clamp(1 - time / time_min, 0.0, 1.0); };
}

}  // namespace wavefount::simulated
