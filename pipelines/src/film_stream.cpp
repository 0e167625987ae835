#include "film_stream.h"

#include <tbb/enumerable_thread_specific.h>
#include <tbb/parallel_pipeline.h>

#include <atomic>
#include <exception>
#include <memory>
#include <opencv2/core.hpp>
#include <opencv2/imgproc.hpp>
#include <optional>

#include "interruption.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

/// A frame's way through the pipeline: errors travel as values.
struct Passage {
  FrameWork work;
  std::exception_ptr failure;
};

/// Focus of one plane: variance of its Laplacian.
double focus_of(Image& plane) {
  cv::Mat laplacian;
  cv::Laplacian(as_matrix(plane), laplacian, CV_32F);
  cv::Scalar mean;
  cv::Scalar deviation;
  cv::meanStdDev(laplacian, mean, deviation);
  return deviation[0];
}

/// z-planes are summed for brightness; the best-focused one serves outlines.
void read_planes(FrameReader& reader, const FilmDescription& film, FrameWork& work) {
  work.pixels = reader.read(work.frame, film.reporter, 0);
  work.sharpest = work.pixels;
  if (film.z_planes == 1) return;
  double best = focus_of(*work.pixels);
  auto sum = make_image(film.width, film.height);
  as_matrix(*work.pixels).copyTo(as_matrix(*sum));
  for (int z = 1; z < film.z_planes; ++z) {
    auto plane = reader.read(work.frame, film.reporter, z);
    auto total = as_matrix(*sum);
    total += as_matrix(*plane);
    if (const double focus = focus_of(*plane); focus > best) {
      best = focus;
      work.sharpest = plane;
    }
  }
  work.pixels = sum;
}

class FrameStream {
 public:
  FrameStream(const FrameSource& source, const std::vector<FrameStep::Pointer>& steps,
              const RecordStore& film, StageClock& clock)
      : source_(source),
        description_(source.description()),
        steps_(steps),
        film_(film),
        clock_(clock),
        readers_([this] { return source_.reader(); }) {
    for (const auto& step : steps_) names_.push_back(step->declaration().name);
  }

  std::shared_ptr<Passage> pass(int frame) {
    auto passage = std::make_shared<Passage>();
    try {
      start(passage->work, frame);
      if (read(passage->work)) run_steps(passage->work);
    } catch (...) {
      passage->failure = std::current_exception();
    }
    release_pixels(passage->work);
    return passage;
  }

 private:
  void start(FrameWork& work, int frame) const {
    work.frame = frame;
    work.time_min = description_.times_min.at(static_cast<std::size_t>(frame));
    work.observation.frame = frame;
    work.observation.time_min = work.time_min;
  }

  bool read(FrameWork& work) {
    const StageTimer timer(clock_, "read");
    try {
      read_planes(*readers_.local(), description_, work);
      return true;
    } catch (const Problem& problem) {
      work.observation.usable = false;
      work.observation.problem = problem.what();
      return false;
    }
  }

  void run_steps(FrameWork& work) const {
    for (std::size_t i = 0; i < steps_.size(); ++i) {
      const StageTimer timer(clock_, names_[i]);
      steps_[i]->process(work, film_);
    }
  }

  static void release_pixels(FrameWork& work) {
    work.pixels = nullptr;
    work.sharpest = nullptr;
    work.reduced = nullptr;
  }

  const FrameSource& source_;
  const FilmDescription& description_;
  const std::vector<FrameStep::Pointer>& steps_;
  const RecordStore& film_;
  StageClock& clock_;
  std::vector<std::string> names_;
  tbb::enumerable_thread_specific<std::unique_ptr<FrameReader>> readers_;
};

}  // namespace

Observations stream_frames(const FrameSource& source, const std::vector<FrameStep::Pointer>& steps,
                           const RecordStore& film, int tokens, StageClock& clock,
                           const std::function<void()>& on_frame) {
  const int frames = source.description().frames;
  Observations observations;
  observations.frames.reserve(static_cast<std::size_t>(frames));
  FrameStream stream(source, steps, film, clock);
  std::exception_ptr failure;
  std::atomic<bool> failed{false};
  int next = 0;

  const auto index = [&](tbb::flow_control& control) {
    if (next == frames || interrupted() || failed) {
      control.stop();
      return 0;
    }
    return next++;
  };
  const auto work = [&](int frame) { return stream.pass(frame); };
  const auto collect = [&](const std::shared_ptr<Passage>& passage) {
    if (passage->failure && !failed.exchange(true)) failure = passage->failure;
    observations.frames.push_back(std::move(passage->work.observation));
    on_frame();
  };
  using Mode = tbb::filter_mode;
  tbb::parallel_pipeline(
      static_cast<std::size_t>(tokens),
      tbb::make_filter<void, int>(Mode::serial_in_order, index) &
          tbb::make_filter<int, std::shared_ptr<Passage>>(Mode::parallel, work) &
          tbb::make_filter<std::shared_ptr<Passage>, void>(Mode::serial_in_order, collect));
  if (failure) std::rethrow_exception(failure);
  if (interrupted()) throw Interrupted{};
  return observations;
}

}  // namespace wavefount
