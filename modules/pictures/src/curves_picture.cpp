#include <algorithm>
#include <cmath>
#include <map>

#include "scene_of.h"
#include "wavefount/core/interphase.h"
#include "wavefount/core/robust.h"
#include "wavefount/pictures/pictures.h"
#include "wavefount/pictures/plot.h"

namespace wavefount {
namespace {

constexpr int picture_width = 1600;
constexpr double left = 130;
constexpr double top = 124;
constexpr double right = 40;
constexpr double curve_height = 190;
constexpr double curve_gap = 40;
constexpr double foot = 80;
constexpr int most_curves = 5;

struct Curve {
  const Nucleus* nucleus = nullptr;
  const ApertureTrace* aperture = nullptr;
  std::vector<const Interphase*> interphases;
  double along_um = 0;

  int entries() const {
    return static_cast<int>(std::count_if(interphases.begin(), interphases.end(),
                                          [](const auto* one) { return one->entry.has_value(); }));
  }
};

std::vector<Curve> all_curves(const RecordStore& records) {
  const auto tube = tube_or_field(records);
  const auto& nuclei = records.get_or_empty<Nuclei>().nuclei;
  const auto& apertures = records.get_or_empty<ApertureTraces>().traces;
  std::map<int, std::vector<const Interphase*>> interphases;
  for (const auto& interphase : records.get_or_empty<Interphases>().interphases)
    interphases[interphase.nucleus].push_back(&interphase);
  std::vector<Curve> curves;
  for (std::size_t i = 0; i < nuclei.size(); ++i) {
    std::vector<double> x, y;
    for (const auto& point : nuclei[i].points) {
      if (!point.found) continue;
      x.push_back(point.x_um);
      y.push_back(point.y_um);
    }
    if (x.empty()) continue;
    curves.push_back({&nuclei[i], i < apertures.size() ? &apertures[i] : nullptr,
                      interphases[nuclei[i].id], tube.place({median(x), median(y)}).along_um});
  }
  return curves;
}

/// One in each of equal stretches of the tube: with most entries there, and among equals nearest to
/// the middle of the stretch; in order along the tube.
std::vector<Curve> chosen_curves(const RecordStore& records) {
  const auto curves = all_curves(records);
  const double stretch_um = tube_or_field(records).length_um / most_curves;
  std::map<int, Curve> best;
  for (const auto& curve : curves) {
    const int stretch =
        static_cast<int>(std::clamp(curve.along_um / stretch_um, 0.0, most_curves - 0.5));
    const auto off_middle_um = [&](const Curve& one) {
      return std::abs(one.along_um - (stretch + 0.5) * stretch_um);
    };
    auto& chosen = best[stretch];
    const bool better =
        !chosen.nucleus || curve.entries() > chosen.entries() ||
        (curve.entries() == chosen.entries() && off_middle_um(curve) < off_middle_um(chosen));
    if (better) chosen = curve;
  }
  std::vector<Curve> chosen;
  for (const auto& [stretch, curve] : best) chosen.push_back(curve);
  return chosen;
}

class CurvesPicture {
 public:
  CurvesPicture(const RecordStore& records, const std::string& name)
      : film_(records.get<FilmDescription>()),
        curves_(chosen_curves(records)),
        canvas_(picture_width, height_of(curves_.size())) {
    title(canvas_, name, "Brightness, import and mitotic entry");
  }

  Canvas draw() {
    if (curves_.empty()) {
      canvas_.set(palette::grey);
      canvas_.text({picture_width / 2.0, canvas_.height() / 2.0}, "No nuclei were found.",
                   title_size, Anchor::middle);
      return std::move(canvas_);
    }
    legend();
    for (std::size_t i = 0; i < curves_.size(); ++i) curve(i);
    canvas_.set(palette::ink);
    const double middle = top + (canvas_.height() - top - foot) / 2;
    canvas_.text_upwards({34, middle}, "Brightness above cytoplasm (counts)", label_size);
    return std::move(canvas_);
  }

 private:
  static int height_of(std::size_t curves) {
    const auto count = static_cast<double>(std::max<std::size_t>(curves, 2));
    return static_cast<int>(top + count * (curve_height + curve_gap) - curve_gap + foot);
  }

  static Range light_range(const Curve& curve) {
    std::vector<double> values;
    for (const auto& point : curve.nucleus->points)
      if (point.found) values.push_back(point.brightness);
    if (curve.aperture)
      values.insert(values.end(), curve.aperture->signal.begin(), curve.aperture->signal.end());
    std::erase_if(values, [](double value) { return !std::isfinite(value); });
    if (values.empty()) return {0, 1};
    const double low = std::min(0.0, quantile(values, 0.005));
    const double high = std::max(quantile(values, 0.995), low + 1e-6);
    return {low - 0.05 * (high - low), high + 0.22 * (high - low)};  // room for labels above
  }

  void curve(std::size_t index) {
    const auto& one = curves_[index];
    const Box box = {left, top + static_cast<double>(index) * (curve_height + curve_gap),
                     picture_width - left - right, curve_height};
    Plot plot(canvas_, box, {0, film_.times_min.empty() ? 1 : film_.times_min.back()},
              light_range(one), false);
    canvas_.set(palette::ground);
    cairo_rectangle(canvas_.cairo(), box.x, box.y, box.width, box.height);
    cairo_fill(canvas_.cairo());
    plot.clip();
    aperture(plot, one);
    found(plot, one);
    for (const auto* interphase : one.interphases) import(plot, *interphase);
    for (const auto* interphase : one.interphases) entry(plot, *interphase);
    plot.release();
    canvas_.set(palette::ink);
    canvas_.text({box.x + 2, box.y - 8}, "Nucleus " + std::to_string(one.nucleus->id), tick_size,
                 Anchor::start, true);
    canvas_.set(palette::grey);
    canvas_.text({box.x + 150, box.y - 8},
                 "at " + std::to_string(std::lround(one.along_um)) + " µm along the tube",
                 small_size + 1);
    plot.axis_left("", 4);
    const bool last = index + 1 == curves_.size();
    plot.axis_below(last ? "Time since the first frame (min)" : "", last);
  }

  void aperture(Plot& plot, const Curve& one) {
    if (!one.aperture) return;
    const auto& trace = *one.aperture;
    const auto count = std::min(trace.time_min.size(), trace.signal.size());
    cairo_new_path(canvas_.cairo());
    for (std::size_t i = 0; i < count; ++i) {
      if (!std::isfinite(trace.signal[i])) continue;
      const Point at = plot.at(trace.time_min[i], trace.signal[i]);
      cairo_line_to(canvas_.cairo(), at.x, at.y);
    }
    canvas_.set(palette::grey);
    cairo_set_line_width(canvas_.cairo(), 1.5);
    cairo_stroke(canvas_.cairo());
  }

  void found(Plot& plot, const Curve& one) {
    const double spacing_px =
        plot.box().width / std::max<double>(1, static_cast<double>(film_.times_min.size()));
    const double radius = std::clamp(0.3 * spacing_px, 1.4, 4.0);
    for (const auto& point : one.nucleus->points)
      if (point.found && std::isfinite(point.brightness))
        canvas_.disc(plot.at(point.time_min, point.brightness), radius,
                     point.doubtful ? palette::white : palette::second_mark, palette::second_mark,
                     1);
  }

  void import(Plot& plot, const Interphase& interphase) {
    constexpr int steps = 60;
    if (!interphase.import || film_.times_min.empty()) return;
    const double from = interphase.import->formed_min.value_or(interphase.import->start_min);
    const auto frame = static_cast<std::size_t>(std::max(interphase.last_frame, 0));
    const double last = film_.times_min[std::min(frame, film_.times_min.size() - 1)];
    const double to = interphase.entry ? interphase.entry->time_min : std::max(last, from);
    cairo_new_path(canvas_.cairo());
    for (int i = 0; i <= steps; ++i) {
      const double time = from + (to - from) * i / steps;
      const Point at = plot.at(time, interphase.import->brightness_at(time));
      cairo_line_to(canvas_.cairo(), at.x, at.y);
    }
    canvas_.set(palette::ink);
    cairo_set_line_width(canvas_.cairo(), 2.6);
    cairo_stroke(canvas_.cairo());
  }

  void entry(Plot& plot, const Interphase& interphase) {
    if (!interphase.entry) return;
    const auto& time = *interphase.entry;
    const double x = plot.x_at(time.time_min);
    const double half = std::max(0.0, plot.x_at(time.time_min + time.se_min) - x);
    const Box& box = plot.box();
    canvas_.set(palette::mark, 0.35);
    cairo_rectangle(canvas_.cairo(), x - half, box.y, 2 * half, box.height);
    cairo_fill(canvas_.cairo());
    canvas_.set(palette::mark);
    canvas_.line({x, box.y}, {x, box.y + box.height}, 2.4);
    const auto words = label_of(time);
    const double width = canvas_.text_width(words, small_size);
    const bool fits = x + 8 + width < box.x + box.width;
    canvas_.set(palette::ink);
    canvas_.text({fits ? x + 7 : x - 7, box.y + 17}, words, small_size,
                 fits ? Anchor::start : Anchor::end);
  }

  /// Two digits of the standard error, but no milliseconds, and the time to as many decimals.
  static std::string label_of(const Entry& entry) {
    if (!(entry.se_min > 0)) return fixed_text(entry.time_min, 2);
    const int decimals =
        std::clamp(1 - static_cast<int>(std::floor(std::log10(entry.se_min))), 0, 3);
    return fixed_text(entry.time_min, decimals) + " ± " + fixed_text(entry.se_min, decimals);
  }

  void legend() {
    constexpr double y = 72;
    double x = left;
    const auto entry = [&](const std::string& words) {
      canvas_.set(palette::ink);
      canvas_.text({x + 44, y + 5}, words, small_size + 1);
      x += 44 + canvas_.text_width(words, small_size + 1) + 34;
    };
    canvas_.disc({x + 26, y}, 4, palette::second_mark, palette::second_mark, 1);
    entry("inside the outline");
    canvas_.set(palette::grey);
    canvas_.line({x + 6, y}, {x + 38, y}, 1.5);
    entry("fixed aperture");
    canvas_.set(palette::ink);
    canvas_.line({x + 6, y}, {x + 38, y}, 2.6);
    entry("fitted import");
    canvas_.set(palette::mark, 0.35);
    cairo_rectangle(canvas_.cairo(), x + 16, y - 10, 14, 20);
    cairo_fill(canvas_.cairo());
    canvas_.set(palette::mark);
    canvas_.line({x + 23, y - 10}, {x + 23, y + 10}, 2.4);
    entry("mitotic entry ± standard error (min)");
  }

  const FilmDescription& film_;
  const std::vector<Curve> curves_;
  Canvas canvas_;
};

}  // namespace

Canvas draw_curves(const RecordStore& records, const std::string& name) {
  return CurvesPicture(records, name).draw();
}

}  // namespace wavefount
