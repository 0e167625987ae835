#include <algorithm>
#include <cmath>

#include "pixels.h"
#include "scene_of.h"
#include "wavefount/core/interphase.h"
#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"
#include "wavefount/core/wave.h"
#include "wavefount/pictures/kymograph.h"
#include "wavefount/pictures/pictures.h"
#include "wavefount/pictures/plot.h"

namespace wavefount {
namespace {

constexpr int picture_width = 1600;
constexpr int picture_height = 1000;
constexpr Box field = {120, 72, 1180, 820};
constexpr double side = 1330;  // left of what stands beside the field
constexpr int most_frames = 480;
constexpr std::size_t light_samples = 100'000;

class KymographPicture {
 public:
  KymographPicture(const RecordStore& records, const std::string& name)
      : records_(records),
        film_(records.get<FilmDescription>()),
        tube_(tube_or_field(records)),
        canvas_(picture_width, picture_height),
        plot_(canvas_, field, {0, tube_.length_um},
              {0, film_.times_min.empty() ? 1 : film_.times_min.back()}, true) {
    title(canvas_, name, "Kymograph");
  }

  Canvas draw() {
    ground();
    plot_.clip();
    for (const auto& wave : waves()) fronts(wave);
    entries();
    for (const auto& wave : waves()) origins(wave);
    plot_.release();
    wave_numbers();
    axes();
    legend();
    return std::move(canvas_);
  }

 private:
  const std::vector<Wave>& waves() const { return records_.get_or_empty<Waves>().waves; }
  const std::vector<WaveEntry>& wave_entries() const {
    return records_.get_or_empty<WaveEntries>().entries;
  }

  void ground() {
    auto kymograph = kymograph_of(records_, most_frames);
    remove_standing_light(kymograph);
    canvas_.set(light_map()(0));
    cairo_rectangle(canvas_.cairo(), field.x, field.y, field.width, field.height);
    cairo_fill(canvas_.cairo());
    if (kymograph.frames.empty()) return;
    const auto range = light_range(kymograph);
    paint(kymograph, range);
    light_bar(range, kymograph.frames.size());
  }

  static Range light_range(const Kymograph& kymograph) {
    std::vector<double> seen;
    const std::size_t stride = 1 + kymograph.light.size() / light_samples;
    for (std::size_t i = 0; i < kymograph.light.size(); i += stride)
      if (kymograph.light[i] >= 0) seen.push_back(kymograph.light[i]);
    Range range{quantile(seen, 0.01), quantile(seen, 0.997)};
    if (!(range.span() > 0)) range.high = range.low + 1;
    return range;
  }

  /// One row of pixels a frame, each stretched over the time until half-way to its neighbours.
  void paint(const Kymograph& kymograph, Range range) {
    const int height = static_cast<int>(field.height);
    PixelImage image(kymograph.columns, height);
    std::size_t row = 0;
    for (int y = 0; y < height; ++y) {
      const double time = (y + 0.5) / height * (film_.times_min.empty() ? 1 : last_min());
      const auto frame_min = [&](std::size_t at) {
        return film_.times_min[static_cast<std::size_t>(kymograph.frames[at])];
      };
      while (row + 1 < kymograph.frames.size() &&
             frame_min(row + 1) - time <= time - frame_min(row))
        ++row;
      for (int x = 0; x < kymograph.columns; ++x)
        image.set(x, y, light_map().pixel((kymograph.at(row, x) - range.low) / range.span()));
    }
    image.paint(canvas_, field);
  }

  double last_min() const { return std::max(film_.times_min.back(), 1e-9); }

  void light_bar(Range range, std::size_t frames) {
    constexpr double height = 230;
    const double top = field.y + field.height - height - 10;
    canvas_.set(palette::ink);
    canvas_.text({side, top - 34}, "Mean light across", small_size + 1);
    canvas_.text({side, top - 16}, frames > 9 ? "above its dark level" : "the tube",
                 small_size + 1);
    colour_bar(canvas_, {side + 26, top, 24, height}, light_map(), range, "counts");
  }

  void fronts(const Wave& wave) {
    for (const auto& front : wave.fronts) {
      const Point from = plot_.at(front.from_um, front.from_min);
      const Point to = plot_.at(front.to_um, front.to_min);
      canvas_.set(palette::ink, 0.8);
      canvas_.line(from, to, 6);
      canvas_.set(palette::white);
      canvas_.line(from, to, 2.6);
    }
  }

  void entries() {
    const double radius = std::clamp(90 / std::sqrt(1.0 + double(wave_entries().size())), 3.0, 6.0);
    for (const auto& entry : wave_entries())
      canvas_.disc(plot_.at(entry.along_um, entry.time_min), radius, palette::mark, palette::ink,
                   1.2);
    if (wave_entries().empty())
      for (const auto& interphase : records_.get_or_empty<Interphases>().interphases)
        if (interphase.entry)
          canvas_.disc(
              plot_.at(tube_.place(interphase.place_um).along_um, interphase.entry->time_min),
              radius, palette::mark, palette::ink, 1.2);
  }

  void origins(const Wave& wave) {
    for (const auto& origin : wave.origins) {
      if (!worth_a_mark(origin)) continue;
      const Point at = plot_.at(origin.along_um, origin.entry_min);
      const double radius = origin.claimed ? 15 : 10;
      draw_origin(canvas_, at, origin.claimed, radius);
      const double inside = std::clamp(at.x, field.x + 24, field.x + field.width - 24);
      canvas_.text_on_picture({inside, at.y - radius - 5}, probability_text(origin.probability),
                              small_size, palette::white, Anchor::middle);
    }
  }

  /// At the right edge, at the time when each wave was last seen there.
  void wave_numbers() {
    double lowest_free = field.y;
    for (const auto& wave : waves()) {
      const WaveEntry* rightmost = nullptr;
      for (const int i : wave.entries) {
        const auto at = static_cast<std::size_t>(i);
        if (at >= wave_entries().size()) continue;
        const auto& entry = wave_entries()[at];
        if (!rightmost || entry.along_um > rightmost->along_um) rightmost = &entry;
      }
      if (!rightmost) continue;
      const double y = std::max(plot_.y_at(rightmost->time_min), lowest_free) + 5;
      canvas_.set(palette::ink);
      canvas_.text({field.x + field.width + 8, y}, std::to_string(wave.number), small_size + 1,
                   Anchor::start, true);
      lowest_free = y + 12;
    }
  }

  void axes() {
    const Box bounds = bounds_of(tube_.axis_um);
    const std::string end = bounds.height > bounds.width ? "top" : "left";
    plot_.axis_below("Along the tube from its " + end + " end (µm)");
    plot_.axis_left("Time since the first frame (min)", 8);
  }

  void legend() {
    double y = field.y + 16;
    const auto entry = [&](const std::string& words) {
      canvas_.set(palette::ink);
      canvas_.text({side + 62, y + 5}, words, small_size + 1);
      y += 34;
    };
    canvas_.set(palette::ink);
    canvas_.text({side, y}, waves().empty() ? "No waves found" : "Bold numbers: waves",
                 small_size + 1, Anchor::start, !waves().empty());
    y += 34;
    canvas_.set(light_map()(0.15));
    cairo_rectangle(canvas_.cairo(), side, y - 17, 50, 4 * 34);
    cairo_fill(canvas_.cairo());
    canvas_.disc({side + 25, y}, 6, palette::mark, palette::ink, 1.2);
    entry("mitotic entry");
    canvas_.set(palette::ink, 0.8);
    canvas_.line({side + 7, y}, {side + 43, y}, 6);
    canvas_.set(palette::white);
    canvas_.line({side + 7, y}, {side + 43, y}, 2.6);
    entry("fitted front");
    draw_origin(canvas_, {side + 25, y}, true, 11);
    entry("origin, its probability");
    draw_origin(canvas_, {side + 25, y}, false, 8);
    entry("candidate, not claimed");
  }

  const RecordStore& records_;
  const FilmDescription& film_;
  const Tube tube_;
  Canvas canvas_;
  Plot plot_;
};

}  // namespace

Canvas draw_kymograph(const RecordStore& records, const std::string& name) {
  return KymographPicture(records, name).draw();
}

}  // namespace wavefount
