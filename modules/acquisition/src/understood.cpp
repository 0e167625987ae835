#include <algorithm>

#include "wavefount/acquisition/open_film.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

std::string count_text(std::size_t count, const std::string& one, const std::string& many) {
  return std::to_string(count) + " " + (count == 1 ? one : many);
}

std::string frames_sentence(const FilmDescription& film) {
  return count_text(static_cast<std::size_t>(film.frames), "frame", "frames") + " of " +
         std::to_string(film.width) + " × " + std::to_string(film.height) + " pixels, " +
         std::to_string(film.bit_depth) + " bits.";
}

std::string scale_sentence(const FilmDescription& film) {
  return rounded_text(film.pixel_um) + " µm a pixel: the image shows " +
         rounded_text(film.pixel_um * film.width) + " × " +
         rounded_text(film.pixel_um * film.height) + " µm.";
}

std::string times_sentence(const FilmDescription& film) {
  if (film.times_min.size() < 2) return "One frame: there is no time to measure in.";
  double shortest = film.times_min.back(), longest = 0;
  for (std::size_t i = 1; i < film.times_min.size(); ++i) {
    const double step = film.times_min[i] - film.times_min[i - 1];
    shortest = std::min(shortest, step);
    longest = std::max(longest, step);
  }
  constexpr double even_within = 1.02;
  std::string text = "A frame every " + rounded_text(film.frame_interval_min()) + " min for " +
                     rounded_text(film.times_min.back()) + " min";
  if (longest > shortest * even_within) {
    text += ", unevenly: from " + rounded_text(shortest) + " to " + rounded_text(longest) + " min";
  }
  return text + ".";
}

std::string channels_sentence(const FilmDescription& film) {
  std::vector<std::string> parts;
  for (int c = 0; c < static_cast<int>(film.channels.size()); ++c) {
    std::string part = film.channels[static_cast<std::size_t>(c)];
    if (c == film.reporter) part += " (reporter)";
    if (c == film.brightfield) part += " (brightfield)";
    if (c == film.field) part += " (field)";
    parts.push_back(part);
  }
  std::string text = parts.size() == 1 ? "Imaging channel: " : "Imaging channels: ";
  text += joined(parts, ", ");
  if (film.z_planes > 1) text += "; " + std::to_string(film.z_planes) + " z planes";
  return text + ".";
}

std::string camera_sentence(const FilmDescription& film) {
  std::vector<std::string> given, estimated;
  const auto sort = [&](const std::optional<double>& value, const std::string& name,
                        const std::string& unit) {
    if (value) {
      given.push_back(name + " " + rounded_text(*value) + " " + unit);
    } else {
      estimated.push_back(name);
    }
  };
  sort(film.camera.gain_electrons_per_count, "gain", "electrons a count");
  sort(film.camera.read_noise_electrons, "read noise", "electrons");
  sort(film.camera.dark_offset_counts, "dark offset", "counts");
  std::string text = film.optics == Optics::sectioned ? "Optical sections" : "Widefield images";
  if (!given.empty()) text += "; " + joined(given, ", ");
  if (!estimated.empty()) text += "; estimated from the film: " + joined(estimated, ", ");
  return text + ".";
}

std::string boundary_text(const char* name, const std::optional<Boundary>& boundary) {
  if (!boundary) return {};
  return std::string(name) + (*boundary == Boundary::open ? " open" : " closed");
}

std::string overrides_sentence(const FilmDescription& film) {
  const auto& given = film.overrides;
  std::vector<std::string> parts;
  if (given.tube_width_um)
    parts.push_back("tube " + rounded_text(*given.tube_width_um) + " µm wide");
  for (const auto& part :
       {boundary_text("left end", given.left_end), boundary_text("right end", given.right_end),
        boundary_text("upper wall", given.upper_wall),
        boundary_text("lower wall", given.lower_wall)}) {
    if (!part.empty()) parts.push_back(part);
  }
  if (!given.outline_um.empty()) parts.emplace_back("outline given");
  if (given.first_healthy_min) {
    parts.push_back("healthy from " + rounded_text(*given.first_healthy_min) + " min");
  }
  if (given.last_healthy_min) {
    parts.push_back("healthy until " + rounded_text(*given.last_healthy_min) + " min");
  }
  if (!given.exclude_frames.empty()) {
    parts.push_back(count_text(given.exclude_frames.size(), "frame", "frames") + " left out");
  }
  if (!given.exclude_um.empty()) {
    parts.push_back(count_text(given.exclude_um.size(), "area", "areas") + " left out");
  }
  return parts.empty() ? std::string() : "Given: " + joined(parts, ", ") + ".";
}

std::string sheet_sentence(const FilmDescription& film) {
  std::vector<std::string> parts;
  for (const auto& column : film.sheet_columns) {
    const auto cell = film.sheet.find(column);
    if (cell != film.sheet.end() && !cell->second.empty()) {
      parts.push_back(column + " " + cell->second);
    }
  }
  return parts.empty() ? std::string() : "From the sheet: " + joined(parts, ", ") + ".";
}

}  // namespace

std::vector<std::string> understood(const FilmDescription& film) {
  std::vector<std::string> sentences;
  for (auto& sentence :
       {frames_sentence(film), scale_sentence(film), times_sentence(film), channels_sentence(film),
        camera_sentence(film), overrides_sentence(film), sheet_sentence(film)}) {
    if (!sentence.empty()) sentences.push_back(sentence);
  }
  return sentences;
}

}  // namespace wavefount
