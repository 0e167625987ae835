#include "wavefount/acquisition/open_film.h"

#include <algorithm>
#include <chrono>
#include <cmath>
#include <optional>

#include "channel_roles.h"
#include "film_times.h"
#include "frame_folder.h"
#include "plane_table.h"
#include "sidecar.h"
#include "tiff_film.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

/// What all parts of the opening look at.
struct Opening {
  const FoundFilm& found;
  const ChannelRoles& roles;
  Sidecar sidecar;
  std::optional<OmeMetadata> metadata;
  const OmeSeries* series = nullptr;  ///< of metadata; null where there is none
  PlaneTable table;
};

std::string sidecar_name(const Opening& opening) {
  return opening.sidecar.file.filename().string();
}

PlaneOrder order_from_sidecar(const Opening& opening, int channels, int z_planes) {
  const auto& sidecar = opening.sidecar;
  PlaneOrder order;
  order.channels = sidecar.channels.empty() ? channels : static_cast<int>(sidecar.channels.size());
  order.z_planes = sidecar.z_planes.value_or(z_planes);
  std::string letters = sidecar.order;
  for (const char letter : std::string("CZT")) {
    if (letters.find(letter) == std::string::npos) letters += letter;
  }
  const bool named_c = sidecar.order.find('C') != std::string::npos;
  const bool named_z = sidecar.order.find('Z') != std::string::npos;
  if (!sidecar.order.empty() &&
      ((order.channels > 1 && !named_c) || (order.z_planes > 1 && !named_z))) {
    throw Problem("The sidecar " + sidecar_name(opening) +
                  " gives an order without all of the dimensions that the film has; write all of "
                  "them, as in \"order: CZT\".");
  }
  order.letters = letters;
  return order;
}

void map_ome_planes(Opening& opening) {
  const auto& found = opening.found;
  opening.metadata = ome_of(found.source);
  if (found.image >= static_cast<int>(opening.metadata->series.size())) {
    throw Problem("The file " + found.source.filename().string() + " has no image " +
                  std::to_string(found.image + 1) + " any more.");
  }
  opening.series = &opening.metadata->series[static_cast<std::size_t>(found.image)];
  const auto& sidecar = opening.sidecar;
  if (sidecar.order.empty() && !sidecar.z_planes) {
    opening.table = planes_of_series(*opening.metadata, found.image, found.source);
  } else {
    opening.table = planes_in_order(
        {found.source},
        order_from_sidecar(opening, opening.series->channels, opening.series->z_planes));
  }
}

/// The frames' own OME-XML, where there is one, knows the scale but not the film.
void map_folder_planes(Opening& opening) {
  const auto files = frame_files(opening.found.source);
  opening.table = planes_in_order(files, order_from_sidecar(opening, 1, 1));
  if (!is_ome_xml(opening.table.description)) return;
  try {
    opening.metadata = parse_ome(opening.table.description, files.front().filename().string());
  } catch (const Problem& problem) {
    opening.table.notes.emplace_back(problem.what());
    return;
  }
  if (opening.metadata->series.empty()) return;
  auto& series = opening.metadata->series.front();
  series.planes.clear();
  series.interval_min.reset();
  opening.series = &series;
}

void map_planes(Opening& opening) {
  switch (opening.found.kind) {
    case FilmKind::ome:
      map_ome_planes(opening);
      break;
    case FilmKind::pages:
      opening.table = planes_in_order({opening.found.source}, order_from_sidecar(opening, 1, 1));
      break;
    case FilmKind::frames:
      map_folder_planes(opening);
      break;
  }
  keep_whole_frames(opening.table);
  drop_broken_end(opening.table);
}

void describe_channels(const Opening& opening, FilmDescription& film) {
  const auto channels = static_cast<std::size_t>(opening.table.channels);
  const auto& named = opening.sidecar.channels;
  if (!named.empty() && named.size() != channels) {
    throw Problem("The sidecar " + sidecar_name(opening) + " names " +
                  std::to_string(named.size()) + " imaging channels, but the film has " +
                  std::to_string(channels) + "; name each in the film's order.");
  }
  if (!named.empty()) {
    film.channels = named;
  } else if (opening.series != nullptr && opening.series->channel_names.size() == channels) {
    film.channels = opening.series->channel_names;
  } else {
    for (std::size_t c = 1; c <= channels; ++c) {
      film.channels.push_back("channel " + std::to_string(c));
    }
  }
  assign_roles(film, opening.roles, sidecar_name(opening));
}

void describe_pixels(const Opening& opening, FilmDescription& film) {
  const auto& planes = opening.table.planes;
  const auto whole = std::find_if(planes.begin(), planes.end(),
                                  [](const Plane& plane) { return plane.page.problem.empty(); });
  const auto& page = whole->page;
  film.width = page.width;
  film.height = page.height;
  film.frames = opening.table.frames;
  film.z_planes = opening.table.z_planes;
  film.bit_depth = page.bits;
  const auto metadata_bits =
      opening.series != nullptr ? opening.series->significant_bits : std::optional<int>();
  const auto bits = opening.sidecar.bit_depth ? opening.sidecar.bit_depth : metadata_bits;
  if (bits && page.kind != SampleKind::real) film.bit_depth = std::min(*bits, page.bits);
  if (page.inverted) {
    film.notes.emplace_back("The file marks low values as white; the pixels were inverted.");
  }
  if (film.z_planes > 1) {
    film.notes.push_back("The " + std::to_string(film.z_planes) +
                         " z planes are summed for brightness; the sharpest gives the outlines.");
  }
}

std::optional<double> pixel_size(const Opening& opening) {
  if (opening.sidecar.pixel_um) return opening.sidecar.pixel_um;
  if (opening.series == nullptr) return std::nullopt;
  const auto& x = opening.series->pixel_x_um;
  const auto& y = opening.series->pixel_y_um;
  constexpr double square_within = 0.005;
  if (x && y && std::abs(*x / *y - 1) > square_within) {
    throw Problem("The film " + opening.found.name + " says that its pixels are " +
                  rounded_text(*x) + " × " + rounded_text(*y) +
                  " µm, but only square ones are measured; if that is wrong, write "
                  "\"pixel_size_um: 0.65\" (with the true value) into " +
                  sidecar_name(opening) + " beside the film.");
  }
  return x ? x : y;
}

/// Scale and times; complains of all that is missing in one sentence.
void describe_scale(const Opening& opening, FilmDescription& film) {
  const auto pixel = pixel_size(opening);
  film.pixel_um = pixel.value_or(0);
  film.times_min = film_times(
      {film.name, &opening.sidecar, opening.series, film.frames, film.reporter, opening.table.cut},
      film.notes);
  std::vector<std::string> missing, lines;
  if (!pixel) {
    missing.emplace_back("its pixel size");
    lines.emplace_back("\"pixel_size_um: 0.65\"");
  }
  if (film.times_min.empty()) {
    missing.emplace_back("the times of its frames");
    lines.emplace_back("\"frame_interval_min: 1\"");
  }
  if (missing.empty()) return;
  throw Problem("The film " + film.name + " does not say " + joined(missing, " and ") + "; write " +
                joined(lines, " and ") + " (with the true value) into " + sidecar_name(opening) +
                " beside the film.");
}

void describe_exposure(const Opening& opening, FilmDescription& film) {
  if (opening.series != nullptr) {
    film.exposure_min = film_exposure(*opening.series, film.reporter);
  }
  const auto cell = film.sheet.find("exposure_ms");
  const auto milliseconds =
      cell == film.sheet.end() ? std::optional<double>() : parse_number(cell->second);
  constexpr double ms_per_min = 60000;
  if (milliseconds && *milliseconds >= 0) film.exposure_min = *milliseconds / ms_per_min;
  const double interval = film.frame_interval_min();
  if (film.frames > 1 && film.exposure_min > interval) {
    film.notes.push_back("The exposure of " + rounded_text(film.exposure_min) +
                         " min is longer than the frame interval and was left out.");
    film.exposure_min = 0;
  }
}

void describe_optics(const Opening& opening, FilmDescription& film) {
  film.camera = opening.sidecar.camera;
  if (opening.sidecar.optics) {
    film.optics = *opening.sidecar.optics;
  } else if (opening.series != nullptr && opening.series->optics) {
    film.optics = *opening.series->optics;
  } else {
    film.notes.push_back(
        "The optics were taken as widefield; for an optical section write "
        "\"optics: sectioned\" into " +
        sidecar_name(opening) + ".");
  }
}

void describe_overrides(const Opening& opening, FilmDescription& film) {
  film.overrides = opening.sidecar.overrides;
  auto& frames = film.overrides.exclude_frames;
  const auto beyond = std::lower_bound(frames.begin(), frames.end(), film.frames);
  if (beyond != frames.end() && !opening.table.cut) {
    film.notes.push_back("The sidecar " + sidecar_name(opening) + " excludes frame " +
                         std::to_string(*beyond) + ", but the last frame is " +
                         std::to_string(film.frames - 1) + "; frames count from 0.");
  }
  frames.erase(beyond, frames.end());
  frames.insert(frames.end(), opening.table.unusable.begin(), opening.table.unusable.end());
  std::sort(frames.begin(), frames.end());
  frames.erase(std::unique(frames.begin(), frames.end()), frames.end());
  if (static_cast<int>(frames.size()) == film.frames) {
    throw Problem("All frames of the film " + film.name + " are excluded or damaged; correct " +
                  "exclude_frames in " + sidecar_name(opening) + ".");
  }
}

InputFile input_file(const std::filesystem::path& file) {
  std::error_code ignored;
  InputFile input;
  input.path = file;
  input.bytes = std::filesystem::file_size(file, ignored);
  const auto modified = std::filesystem::last_write_time(file, ignored).time_since_epoch();
  input.modified_ns = std::chrono::duration_cast<std::chrono::nanoseconds>(modified).count();
  return input;
}

void list_files(const Opening& opening, FilmDescription& film) {
  std::vector<std::filesystem::path> files = opening.table.files;
  if (opening.found.kind == FilmKind::ome &&
      std::find(files.begin(), files.end(), opening.found.source) == files.end()) {
    files.push_back(opening.found.source);
  }
  if (opening.sidecar.present) files.push_back(opening.sidecar.file);
  if (!opening.sidecar.times_file.empty()) files.push_back(opening.sidecar.times_file);
  for (const auto& file : files) {
    std::error_code ignored;
    if (std::filesystem::exists(file, ignored)) film.files.push_back(input_file(file));
  }
}

FilmDescription describe(const Opening& opening) {
  FilmDescription film;
  film.name = opening.found.name;
  film.source = opening.found.source;
  film.sheet = opening.found.sheet;
  film.sheet_columns = opening.found.sheet_columns;
  film.notes = opening.sidecar.notes;
  film.notes.insert(film.notes.end(), opening.table.notes.begin(), opening.table.notes.end());
  list_files(opening, film);
  describe_pixels(opening, film);
  describe_channels(opening, film);
  describe_scale(opening, film);
  describe_exposure(opening, film);
  describe_optics(opening, film);
  describe_overrides(opening, film);
  return film;
}

}  // namespace

std::shared_ptr<const FrameSource> open_film(const FoundFilm& film, const ChannelRoles& roles) {
  if (!film.problem.empty()) throw Problem(film.problem);
  Opening opening{film, roles, read_sidecar(film.sidecar), std::nullopt, nullptr, {}};
  map_planes(opening);
  auto description = describe(opening);
  return std::make_shared<const TiffFilm>(std::move(description), std::move(opening.table));
}

}  // namespace wavefount
