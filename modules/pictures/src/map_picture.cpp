#include <algorithm>
#include <cmath>
#include <map>

#include "pixels.h"
#include "scene_of.h"
#include "wavefount/core/nucleus.h"
#include "wavefount/core/robust.h"
#include "wavefount/core/text.h"
#include "wavefount/core/wave.h"
#include "wavefount/pictures/pictures.h"
#include "wavefount/pictures/plot.h"

namespace wavefount {
namespace {

constexpr int picture_width = 1600;
constexpr int tallest = 1500;
constexpr double left = 30;
constexpr double top = 72;
constexpr double side_width = 240;  // for the colour bar and the legend
constexpr double heading = 30;
constexpr double foot = 64;  // for the scale bar
constexpr double legend_height = 430;
constexpr int most_panels = 12;

struct NucleusPlace {
  int id = 0;
  Point um;
};

std::vector<NucleusPlace> places_of(const Nuclei& nuclei) {
  std::vector<NucleusPlace> places;
  for (const auto& nucleus : nuclei.nuclei) {
    std::vector<double> x, y;
    for (const auto& point : nucleus.points) {
      if (!point.found) continue;
      x.push_back(point.x_um);
      y.push_back(point.y_um);
    }
    if (!x.empty()) places.push_back({nucleus.id, {median(x), median(y)}});
  }
  return places;
}

double radius_um_of(const Nuclei& nuclei) {
  std::vector<double> radii;
  for (const auto& nucleus : nuclei.nuclei)
    for (const auto& point : nucleus.points)
      if (point.found && point.radius_um > 0) radii.push_back(point.radius_um);
  return median(std::move(radii));
}

Box with_margin(Box box, double margin) {
  return {box.x - margin, box.y - margin, box.width + 2 * margin, box.height + 2 * margin};
}

class MapPicture {
 public:
  MapPicture(const RecordStore& records, const std::string& name)
      : waves_(records.get_or_empty<Waves>().waves),
        entries_(records.get_or_empty<WaveEntries>().entries),
        tube_(tube_or_field(records)),
        places_(places_of(records.get_or_empty<Nuclei>())),
        radius_um_(radius_um_of(records.get_or_empty<Nuclei>())),
        view_(with_margin(bounds_of(tube_.outline_um), 0.02 * tube_.length_um)),
        shown_(std::min(static_cast<int>(waves_.size()), most_panels)),
        panels_(arrange(std::max(shown_, 1), view_.width, view_.height,
                        {left, top, picture_width - 2 * left - side_width, tallest - top - foot},
                        heading)),
        canvas_(picture_width, height_of(panels_)) {
    title(canvas_, name, "Map of mitotic entry");
    for (int i = 0; i < shown_; ++i) {
      const auto& wave = waves_[static_cast<std::size_t>(i)];
      longest_min_ = std::max(longest_min_, wave.end_min - wave.start_min);
    }
  }

  Canvas draw() {
    for (int i = 0; i < shown_; ++i) wave_panel(i);
    if (shown_ == 0) plain_panel();
    scale_bar(canvas_, {left + 6, top + panels_.height() + 46}, panels_.scale, 260, palette::ink);
    legend();
    return std::move(canvas_);
  }

 private:
  static int height_of(const Panels& panels) {
    return static_cast<int>(top + std::max(panels.height() + foot, legend_height));
  }

  Point on(int panel, Point um) const {
    const Point corner = panels_.corner(panel);
    return {corner.x + (um.x - view_.x) * panels_.scale,
            corner.y + (um.y - view_.y) * panels_.scale};
  }

  void path(int panel, const Polygon& polygon) {
    for (const auto& point : polygon) {
      const Point at = on(panel, point);
      cairo_line_to(canvas_.cairo(), at.x, at.y);
    }
    cairo_close_path(canvas_.cairo());
  }

  void tube(int panel) {
    path(panel, tube_.outline_um);
    canvas_.set(palette::ground);
    cairo_fill_preserve(canvas_.cairo());
    canvas_.set(palette::glass);
    cairo_set_line_width(canvas_.cairo(), tube_.measured ? 2.5 : 1);
    cairo_stroke(canvas_.cairo());
    for (const auto& hole : tube_.holes_um) {
      path(panel, hole);
      canvas_.set(palette::white);
      cairo_fill_preserve(canvas_.cairo());
      canvas_.set(palette::glass);
      cairo_stroke(canvas_.cairo());
    }
  }

  double radius_px() const { return std::clamp(radius_um_ * panels_.scale, 5.0, 22.0); }

  void panel_title(int panel, const std::string& bold, const std::string& words) {
    const Point corner = panels_.corner(panel);
    canvas_.set(palette::ink);
    canvas_.text({corner.x, corner.y - 9}, bold, tick_size, Anchor::start, true);
    const double shift = canvas_.text_width(bold, tick_size, true) + 14;
    canvas_.set(palette::grey);
    canvas_.text({corner.x + shift, corner.y - 9},
                 canvas_.fitted(words, small_size + 1, panels_.cell_width - shift), small_size + 1);
  }

  void wave_panel(int panel) {
    const auto& wave = waves_[static_cast<std::size_t>(panel)];
    panel_title(panel, "Wave " + std::to_string(wave.number), words_of(wave));
    tube(panel);
    std::map<int, const WaveEntry*> entered;
    for (const int i : wave.entries) {
      const auto at = static_cast<std::size_t>(i);
      if (at < entries_.size()) entered[entries_[at].nucleus] = &entries_[at];
    }
    for (const auto& place : places_)
      if (!entered.contains(place.id))
        canvas_.disc(on(panel, place.um), 0.7 * radius_px(), palette::white, palette::grey, 1);
    for (const auto& [nucleus, entry] : entered) {
      const double share = longest_min_ > 0 ? (entry->time_min - wave.start_min) / longest_min_ : 0;
      canvas_.disc(on(panel, {entry->x_um, entry->y_um}), radius_px(), time_map()(share),
                   palette::ink, 1.2);
    }
    for (const auto& origin : wave.origins) mark(panel, origin);
  }

  void mark(int panel, const Origin& origin) {
    if (!worth_a_mark(origin)) return;
    const Point at = on(panel, {origin.x_um, origin.y_um});
    const double radius = std::max(12.0, 1.3 * radius_px());
    draw_origin(canvas_, at, origin.claimed, radius);
    canvas_.text_on_picture({at.x, at.y - radius - 3}, probability_text(origin.probability),
                            small_size, palette::ink, Anchor::middle);
  }

  static std::string words_of(const Wave& wave) {
    std::string words = "from " + fixed_text(wave.start_min, 1) + " min, " +
                        std::to_string(wave.entries.size()) + " nuclei, " + name_of(wave.answer);
    if (wave.slowness && wave.slowness->speed_um_per_min)
      words += ", " + rounded_text(*wave.slowness->speed_um_per_min, 3) + " µm/min";
    return words;
  }

  void plain_panel() {
    panel_title(0, "No waves found", std::to_string(places_.size()) + " nuclei");
    tube(0);
    for (const auto& place : places_)
      canvas_.disc(on(0, place.um), radius_px(), palette::faint, palette::ink, 1.2);
  }

  void legend() {
    const double x = picture_width - side_width + 16;
    if (shown_ > 0) {
      canvas_.set(palette::ink);
      canvas_.text({x, top + 14}, "Mitotic entry after", small_size + 1);
      canvas_.text({x, top + 32}, "the wave's first", small_size + 1);
      colour_bar(canvas_, {x + 26, top + 48, 24, 200}, time_map(), {0, longest_min_}, "minutes");
    }
    double y = top + (shown_ > 0 ? 282 : 14);
    const auto entry = [&](const std::string& words) {
      canvas_.set(palette::ink);
      canvas_.text({x + 36, y + 5}, words, small_size + 1);
      y += 30;
    };
    if (shown_ > 0) {
      canvas_.disc({x + 14, y}, 7, palette::white, palette::grey, 1);
      entry("not in this wave");
      draw_origin(canvas_, {x + 14, y}, true, 12);
      entry("origin, its probability");
      draw_origin(canvas_, {x + 14, y}, false, 9);
      entry("candidate, not claimed");
    }
    const int more = static_cast<int>(waves_.size()) - shown_;
    if (more > 0) entry("and " + std::to_string(more) + " more waves");
  }

  const std::vector<Wave>& waves_;
  const std::vector<WaveEntry>& entries_;
  const Tube tube_;
  const std::vector<NucleusPlace> places_;
  const double radius_um_;
  const Box view_;
  const int shown_;
  const Panels panels_;
  Canvas canvas_;
  double longest_min_ = 0;
};

}  // namespace

Canvas draw_map(const RecordStore& records, const std::string& name) {
  return MapPicture(records, name).draw();
}

}  // namespace wavefount
