#include <gtest/gtest.h>

#include <cmath>
#include <functional>
#include <iostream>
#include <random>

#include "wavefount/core/robust.h"
#include "wavefount/kinetics/bleaching.h"
#include "wavefount/kinetics/blur.h"
#include "wavefount/kinetics/filling.h"
#include "wavefount/kinetics/import.h"

namespace wavefount {
namespace {

constexpr double rate = 0.15;        // 1/min
constexpr double plateau = 400;      // counts
constexpr double cytoplasm = 300;    // counts above the dark offset
constexpr double dark_offset = 100;  // counts

// How the simulated film departs from the model's plain case.
struct Scene {
  double interval_min = 0.5;
  double last_age_min = 20;   // interphase length
  double noise_share = 0.03;  // of a grown nucleus' brightness, per frame
  double stated_share = 1;    // stated over true standard deviation
  double blur_um = 0;         // standard deviation of the point spread function
  double correlation = 0;     // of neighbouring errors
  double bad_share = 0;       // of frames with a wild value
  double bleaching_per_min = 0;
  std::function<double(double)> filling = [](double age) {
    return plateau * -std::expm1(-rate * age);
  };
  int nuclei = 1;
};

struct Simulated {
  Nuclei nuclei;
  Interphases interphases;
};

TracePoint point_at(const Scene& scene, int frame, double formed, double& error,
                    std::mt19937_64& random) {
  std::normal_distribution<double> normal;
  const double time = frame * scene.interval_min, age = time - formed;
  const double radius = 12 * std::cbrt(0.06 + 0.94 * std::min(1.0, age / 15));
  const double bleached = std::exp(-scene.bleaching_per_min * time);
  const double filled = scene.filling(age) * bleached;
  TracePoint p;
  p.frame = frame;
  p.time_min = time;
  p.found = true;
  p.radius_um = radius;
  p.area_um2 = M_PI * radius * radius;
  const double recovery = 1 - 0.798 * scene.blur_um / radius;
  const double sd = scene.noise_share * std::sqrt(0.3 + 0.7 * filled / plateau) * plateau;
  error = scene.correlation * error +
          std::sqrt(1 - scene.correlation * scene.correlation) * normal(random);
  p.brightness = filled * recovery + sd * error;
  if (std::uniform_real_distribution<double>()(random) < scene.bad_share) p.brightness *= 2.2;
  p.brightness_variance = std::pow(sd * scene.stated_share, 2);
  p.cytoplasm = dark_offset + cytoplasm * bleached;
  p.integrated = filled * p.area_um2 * (1 + 0.02 * normal(random));
  return p;
}

Simulated simulate(const Scene& scene, std::uint64_t seed) {
  std::mt19937_64 random(seed);
  Simulated film;
  for (int id = 1; id <= scene.nuclei; ++id) {
    const double formed = 5 + std::uniform_real_distribution<double>(0, 3)(random);
    const double entry = formed + scene.last_age_min;
    Nucleus nucleus;
    nucleus.id = id;
    double error = std::normal_distribution<double>()(random);
    for (int frame = 0; frame * scene.interval_min < entry; ++frame)
      if (frame * scene.interval_min > formed + 0.6)
        nucleus.points.push_back(point_at(scene, frame, formed, error, random));
    Interphase interphase;
    interphase.nucleus = id;
    interphase.first_frame = nucleus.points.front().frame;
    interphase.last_frame = nucleus.points.back().frame;
    interphase.entry = Entry{entry, 0.1, entry + 0.3, ""};
    interphase.place_um.x = formed;  // the truth, carried where this step never looks
    film.nuclei.nuclei.push_back(nucleus);
    film.interphases.interphases.push_back(interphase);
  }
  return film;
}

CameraModel camera() {
  CameraModel model;
  model.offset_given = true;
  model.dark_offset_counts = dark_offset;
  return model;
}

struct Score {
  double rate_bias = 0, initial_bias = 0, relative_bias = 0, formed_error = 0;
  double rate_coverage = 0, initial_coverage = 0, curved_share = 0;
  int fits = 0;
};

Score score_of(const std::string& title, const Scene& scene, int films, double true_rate = rate,
               double true_initial = rate * plateau) {
  std::vector<double> rates, initials, relatives, formed;
  int rates_in = 0, initials_in = 0;
  for (int film = 0; film < films; ++film) {
    auto simulated = simulate(scene, 1000 + film);
    ImportSettings settings;
    settings.before_entry_min = scene.interval_min;
    settings.blur = estimate_blur(simulated.nuclei);
    fit_imports(simulated.interphases, simulated.nuclei, camera(), settings);
    for (const auto& interphase : simulated.interphases.interphases) {
      if (!interphase.import) continue;
      const auto& fit = *interphase.import;
      initials.push_back(fit.initial / true_initial);
      initials_in += std::abs(fit.initial - true_initial) <= 1.96 * fit.initial_se;
      if (fit.relative_per_min)
        relatives.push_back(*fit.relative_per_min * cytoplasm / true_initial);
      formed.push_back(std::abs(*interphase.formed_min - interphase.place_um.x));
      if (!fit.curved) continue;
      rates.push_back(*fit.rate_per_min / true_rate);
      rates_in += std::abs(*fit.rate_per_min - true_rate) <= 1.96 * *fit.rate_se_per_min;
    }
  }
  Score score;
  score.fits = static_cast<int>(initials.size());
  score.rate_bias = median(rates) - 1;
  score.initial_bias = median(initials) - 1;
  score.relative_bias = median(relatives) - 1;
  score.formed_error = median(formed);
  score.rate_coverage = rates_in / std::max(1.0, static_cast<double>(rates.size()));
  score.initial_coverage = initials_in / std::max(1.0, static_cast<double>(initials.size()));
  score.curved_share = static_cast<double>(rates.size()) / std::max(1, score.fits);
  std::cout << "  " << title << ": " << score.fits << " fits, curved " << 100 * score.curved_share
            << " %, bias of rate " << 100 * score.rate_bias << " % (scatter "
            << 100 * robust_sd(rates) << " %), of initial import " << 100 * score.initial_bias
            << " %, 95 % intervals hold rate " << 100 * score.rate_coverage << " %, initial "
            << 100 * score.initial_coverage << " %, formation error " << score.formed_error
            << " min\n";
  return score;
}

void expect_sound(const Score& score, double bias) {
  EXPECT_LT(std::abs(score.rate_bias), bias);
  EXPECT_LT(std::abs(score.initial_bias), bias);
  EXPECT_GT(score.rate_coverage, 0.92);
  EXPECT_GT(score.initial_coverage, 0.92);
  EXPECT_LT(score.rate_coverage, 0.985);
  EXPECT_LT(score.initial_coverage, 0.985);
}

TEST(Import, usual_light) {
  Scene scene;
  scene.nuclei = 20;
  const auto score = score_of("usual light", scene, 30);
  expect_sound(score, 0.03);
  EXPECT_LT(std::abs(score.relative_bias), 0.03);
  EXPECT_LT(score.formed_error, 0.3);
}

TEST(Import, low_light) {
  Scene scene;
  scene.nuclei = 20;
  scene.noise_share = 0.08;
  expect_sound(score_of("low light", scene, 30), 0.05);
}

TEST(Import, coarse_sampling) {
  Scene scene;
  scene.nuclei = 20;
  scene.interval_min = 2;
  expect_sound(score_of("2 min a frame", scene, 30), 0.03);
}

TEST(Import, stated_noise_wrong_by_half) {
  for (const double stated : {0.5, 2.0}) {
    Scene scene;
    scene.nuclei = 20;
    scene.stated_share = stated;
    expect_sound(score_of("stated noise × " + std::to_string(stated), scene, 30), 0.03);
  }
}

TEST(Import, correlated_errors) {
  Scene scene;
  scene.nuclei = 20;
  scene.correlation = 0.5;
  expect_sound(score_of("correlated errors", scene, 30), 0.03);
}

TEST(Import, a_few_bad_frames) {
  Scene scene;
  scene.nuclei = 20;
  scene.bad_share = 0.05;
  expect_sound(score_of("bad frames", scene, 30), 0.03);
}

TEST(Import, small_young_nuclei_dimmed_by_blur) {
  Scene scene;
  scene.nuclei = 20;
  scene.blur_um = 1.0;
  for (int seed = 1; seed <= 8; ++seed) {
    const auto blur = estimate_blur(simulate(scene, seed).nuclei);
    EXPECT_NEAR(blur.loss_um, 0.798, 3.5 * blur.se_um);
    EXPECT_LT(blur.se_um, 0.25);
  }
  Scene sharp;
  sharp.nuclei = 20;
  EXPECT_LT(estimate_blur(simulate(sharp, 1).nuclei).loss_um, 0.5);
  expect_sound(score_of("blurred", scene, 30), 0.03);
}

TEST(Import, one_nucleus_alone_has_an_honest_error) {
  Scene scene;
  const auto score = score_of("one nucleus a film", scene, 400);
  expect_sound(score, 0.03);
}

TEST(Import, a_straight_rise_gives_initial_import_and_no_rate) {
  Scene scene;
  scene.nuclei = 20;
  scene.filling = [](double age) { return 18 * age; };
  const auto score = score_of("straight rise", scene, 20, rate, 18);
  EXPECT_LT(score.curved_share, 0.2);
  EXPECT_LT(std::abs(score.initial_bias), 0.03);
}

TEST(Import, a_nucleus_present_from_the_start_gives_none) {
  Scene scene;
  auto film = simulate(scene, 3);
  film.interphases.interphases[0].start = Start::already_present;
  fit_imports(film.interphases, film.nuclei, camera(), {});
  EXPECT_FALSE(film.interphases.interphases[0].import);
}

TEST(Import, nothing_to_fit_is_no_error) {
  Interphases none;
  fit_imports(none, {}, camera(), {});
  Scene scene;
  auto film = simulate(scene, 3);
  film.nuclei.nuclei[0].points.resize(3);
  fit_imports(film.interphases, film.nuclei, camera(), {});
  EXPECT_FALSE(film.interphases.interphases[0].import);
  for (auto& point : film.nuclei.nuclei[0].points) point.brightness = NAN;
  fit_imports(film.interphases, film.nuclei, camera(), {});
  EXPECT_FALSE(film.interphases.interphases[0].import);
  EXPECT_EQ(estimate_blur({}).loss_um, 0);
}

TEST(Import, without_the_dark_offset_no_relative_import) {
  Scene scene;
  auto film = simulate(scene, 3);
  fit_imports(film.interphases, film.nuclei, CameraModel{}, {});
  ASSERT_TRUE(film.interphases.interphases[0].import);
  EXPECT_FALSE(film.interphases.interphases[0].import->relative_per_min);
}

Observations light(const std::function<double(double)>& level) {
  Observations observations;
  for (int i = 0; i < 200; ++i) {
    FrameObservation frame;
    frame.frame = i;
    frame.time_min = i;
    frame.tube_pixels = 1000;
    frame.total_light = 1000 * (dark_offset + level(i) * (i % 17 == 3 ? 1.3 : 1));
    observations.frames.push_back(frame);
  }
  return observations;
}

Tube closed_tube() {
  Tube tube;
  tube.measured = true;
  return tube;
}

TEST(Bleaching, is_measured_where_it_is_justified) {
  const auto fading = light([](double t) { return 300 * std::exp(-0.001 * t); });
  EXPECT_NEAR(estimate_bleaching(fading, closed_tube(), camera()).rate_per_min, 0.001, 1e-5);
  auto open = closed_tube();
  open.left_end = Boundary::open;
  EXPECT_EQ(estimate_bleaching(fading, open, camera()).rate_per_min, 0);
  EXPECT_EQ(estimate_bleaching(fading, closed_tube(), CameraModel{}).rate_per_min, 0);
  const auto rising = light([](double t) { return 300 + t; });
  EXPECT_EQ(estimate_bleaching(rising, closed_tube(), camera()).rate_per_min, 0);
  const auto step = light([](double t) { return t < 100 ? 300.0 : 200.0; });
  EXPECT_EQ(estimate_bleaching(step, closed_tube(), camera()).rate_per_min, 0);
}

TEST(Bleaching, corrected_import_is_unbiased) {
  Scene scene;
  scene.nuclei = 40;
  scene.bleaching_per_min = 0.01;
  auto film = simulate(scene, 9);
  ImportSettings settings;
  settings.bleaching.rate_per_min = 0.01;
  fit_imports(film.interphases, film.nuclei, camera(), settings);
  std::vector<double> rates;
  for (const auto& interphase : film.interphases.interphases)
    if (interphase.import && interphase.import->rate_per_min)
      rates.push_back(*interphase.import->rate_per_min);
  EXPECT_NEAR(median(rates) / rate, 1, 0.05);
}

}  // namespace
}  // namespace wavefount
