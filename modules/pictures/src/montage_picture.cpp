#include <algorithm>
#include <cmath>

#include "outline_path.h"
#include "pixels.h"
#include "scene_of.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/reduced_film.h"
#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"
#include "wavefount/pictures/pictures.h"
#include "wavefount/pictures/plot.h"

namespace wavefount {
namespace {

constexpr int picture_width = 1600;
constexpr int tallest = 1300;
constexpr double left = 30;
constexpr double top = 68;
constexpr double heading = 30;
constexpr double foot = 66;  // for the scale bar and the legend
constexpr int most_frames = 6;
/// Nuclei in a frame beyond which their numbers would hide the picture.
constexpr std::size_t most_numbers = 150;
constexpr std::size_t light_samples = 200'000;

std::uint32_t grey_pixel(double share) {
  const auto level = static_cast<std::uint32_t>(std::lround(255 * std::clamp(share, 0.0, 1.0)));
  return 0xFF000000U | level << 16U | level << 8U | level;
}

class MontagePicture {
 public:
  MontagePicture(const RecordStore& records, const std::string& name)
      : records_(records),
        film_(records.get<FilmDescription>()),
        reduced_(records.peek<ReducedFilm>()),
        frames_(chosen_frames(records)),
        view_(view_of(records)),
        panels_(arrange(static_cast<int>(frames_.size()), view_.width, view_.height,
                        {left, top, picture_width - 2 * left, tallest - top - foot}, heading)),
        canvas_(picture_width, height_of(panels_)) {
    title(canvas_, name, "Frames with outlines of nuclei");
  }

  Canvas draw() {
    const auto range = light_range();
    for (int panel = 0; panel < static_cast<int>(frames_.size()); ++panel) frame(panel, range);
    const double bottom = canvas_.height() - 22;
    scale_bar(canvas_, {left + 6, bottom}, panels_.scale / pixel_um_of(film_), 260, palette::ink);
    legend(bottom);
    return std::move(canvas_);
  }

 private:
  static int height_of(const Panels& panels) {
    return static_cast<int>(top + panels.height() + foot);
  }

  /// Evenly spread over the usable frames, the first and the last included.
  static std::vector<int> chosen_frames(const RecordStore& records) {
    std::vector<int> usable;
    for (const auto& frame : records.get_or_empty<Observations>().frames)
      if (frame.usable) usable.push_back(frame.frame);
    if (usable.empty()) return {0};
    const int count = std::min(most_frames, static_cast<int>(usable.size()));
    std::vector<int> frames;
    for (int i = 0; i < count; ++i) {
      const auto last = usable.size() - 1;
      frames.push_back(usable[count > 1 ? last * static_cast<std::size_t>(i) /
                                              static_cast<std::size_t>(count - 1)
                                        : 0]);
    }
    return frames;
  }

  /// The tube with a margin, inside what the reduced film covers.
  static Box view_of(const RecordStore& records) {
    const auto& film = records.get<FilmDescription>();
    const auto tube = tube_or_field(records);
    const double pixel_um = pixel_um_of(film);
    const Box um = bounds_of(tube.outline_um);
    const double margin = 0.04 * std::max(um.width, um.height) / pixel_um + 2;
    Box whole{0, 0, std::max(1.0, double(film.width)), std::max(1.0, double(film.height))};
    if (const auto* reduced = records.peek<ReducedFilm>())
      whole = {double(reduced->left()), double(reduced->top()),
               std::max(1.0, double(reduced->width()) * reduced->factor()),
               std::max(1.0, double(reduced->height()) * reduced->factor())};
    const double x0 = std::max(whole.x, um.x / pixel_um - margin);
    const double y0 = std::max(whole.y, um.y / pixel_um - margin);
    const double x1 = std::min(whole.x + whole.width, (um.x + um.width) / pixel_um + margin);
    const double y1 = std::min(whole.y + whole.height, (um.y + um.height) / pixel_um + margin);
    if (x1 - x0 < 1 || y1 - y0 < 1) return whole;
    return {x0, y0, x1 - x0, y1 - y0};
  }

  Range light_range() const {
    std::vector<double> values;
    if (reduced_) {
      for (const int frame : frames_) {
        const auto image = reduced_->read(frame);
        const auto size = static_cast<std::size_t>(reduced_->width()) *
                          static_cast<std::size_t>(reduced_->height());
        const std::size_t stride = 1 + size * frames_.size() / light_samples;
        for (std::size_t i = 0; i < size; i += stride)
          values.push_back(image->GetBufferPointer()[i]);
      }
    }
    Range range{quantile(values, 0.02), quantile(values, 0.998)};
    if (!(range.span() > 0)) range.high = range.low + 1;
    return range;
  }

  Box box_of(int panel) const {
    const Point corner = panels_.corner(panel);
    return {corner.x, corner.y, view_.width * panels_.scale, view_.height * panels_.scale};
  }

  /// From full-size pixels, centres whole, to the canvas.
  Point on(const Box& box, Point px) const {
    return {box.x + (px.x + 0.5 - view_.x) * panels_.scale,
            box.y + (px.y + 0.5 - view_.y) * panels_.scale};
  }

  void frame(int panel, Range range) {
    const int number = frames_[static_cast<std::size_t>(panel)];
    const Box box = box_of(panel);
    heading_of(box, number);
    cairo_save(canvas_.cairo());
    cairo_rectangle(canvas_.cairo(), box.x, box.y, box.width, box.height);
    cairo_clip(canvas_.cairo());
    canvas_.set(palette::ink);
    cairo_paint(canvas_.cairo());
    if (reduced_) light(box, number, range);
    nuclei(box, number);
    cairo_restore(canvas_.cairo());
  }

  void heading_of(const Box& box, int number) {
    const auto at = static_cast<std::size_t>(number);
    canvas_.set(palette::ink);
    std::string time = "Frame " + std::to_string(number);
    if (at < film_.times_min.size())
      time = rounded_text(std::round(100 * film_.times_min[at]) / 100, 7) + " min";
    canvas_.text({box.x, box.y - 9}, time, tick_size, Anchor::start, true);
    const double shift = canvas_.text_width(time, tick_size, true) + 12;
    canvas_.set(palette::grey);
    canvas_.text({box.x + shift, box.y - 9}, "frame " + std::to_string(number), small_size);
  }

  void light(const Box& box, int number, Range range) {
    const auto image = reduced_->read(number);
    PixelImage pixels(reduced_->width(), reduced_->height());
    for (int y = 0; y < reduced_->height(); ++y)
      for (int x = 0; x < reduced_->width(); ++x)
        pixels.set(x, y,
                   grey_pixel((image->GetBufferPointer()[y * reduced_->width() + x] - range.low) /
                              range.span()));
    const double scale = panels_.scale;
    pixels.paint(canvas_, {box.x + (reduced_->left() - view_.x) * scale,
                           box.y + (reduced_->top() - view_.y) * scale,
                           reduced_->width() * reduced_->factor() * scale,
                           reduced_->height() * reduced_->factor() * scale});
  }

  static const TracePoint* point_in(const Nucleus& nucleus, int frame) {
    const auto at =
        std::lower_bound(nucleus.points.begin(), nucleus.points.end(), frame,
                         [](const TracePoint& point, int wanted) { return point.frame < wanted; });
    return at != nucleus.points.end() && at->frame == frame && at->found ? &*at : nullptr;
  }

  void nuclei(const Box& box, int number) {
    const auto& frames = records_.get_or_empty<Observations>().frames;
    const auto at = static_cast<std::size_t>(number);
    if (at >= frames.size()) return;
    const auto& sightings = frames[at].sightings;
    std::vector<bool> followed(sightings.size(), false);
    std::vector<std::pair<int, const TracePoint*>> shown;
    for (const auto& nucleus : records_.get_or_empty<Nuclei>().nuclei) {
      const auto* point = point_in(nucleus, number);
      if (!point) continue;
      shown.emplace_back(nucleus.id, point);
      const auto sighting = static_cast<std::size_t>(point->sighting);
      if (point->sighting >= 0 && sighting < sightings.size()) followed[sighting] = true;
    }
    for (std::size_t i = 0; i < sightings.size(); ++i) outline(box, sightings[i], followed[i]);
    if (shown.size() <= most_numbers)
      for (const auto& [id, point] : shown) label(box, id, *point);
  }

  void outline(const Box& box, const Sighting& sighting, bool followed) {
    add_outline(canvas_, sighting.runs, [&](Point px) { return on(box, px); });
    canvas_.set(followed ? palette::mark : palette::glass);
    cairo_set_line_width(canvas_.cairo(), followed ? 2 : 1.2);
    cairo_stroke(canvas_.cairo());
  }

  /// Right of the nucleus, left of it where the panel ends.
  void label(const Box& box, int id, const TracePoint& point) {
    const double reach = point.radius_um / pixel_um_of(film_) * panels_.scale + 4;
    const Point at = on(box, {point.x_px, point.y_px});
    const auto text = std::to_string(id);
    const bool fits = at.x + reach + canvas_.text_width(text, small_size, true) < box.x + box.width;
    canvas_.text_on_picture({fits ? at.x + reach : at.x - reach, at.y + 5}, text, small_size,
                            palette::white, fits ? Anchor::start : Anchor::end);
  }

  void legend(double y) {
    const double right = picture_width - left;
    canvas_.set(palette::grey);
    canvas_.text({right, y},
                 "Frames as recorded, all at the same contrast. Orange: nuclei followed, numbered "
                 "as in the tables. Pale: other candidates.",
                 small_size + 1, Anchor::end);
  }

  const RecordStore& records_;
  const FilmDescription& film_;
  const ReducedFilm* reduced_;
  const std::vector<int> frames_;
  const Box view_;  ///< what is shown of a frame: full-size pixels, corners as whole numbers
  const Panels panels_;
  Canvas canvas_;
};

}  // namespace

Canvas draw_montage(const RecordStore& records, const std::string& name) {
  return MontagePicture(records, name).draw();
}

}  // namespace wavefount
