#include "sidecar.h"

#include <algorithm>
#include <functional>
#include <map>
#include <numeric>
#include <set>

#include "utf8.h"
#include "wavefount/acquisition/csv_reader.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"
#include "yaml_values.h"

namespace wavefount {
namespace {

constexpr double most_minutes = 1e8;
constexpr int most_frames = 1'000'000;

constexpr const char* times_form = "a list of minutes, one a frame, as in [0, 1, 2.5]";
constexpr const char* frames_form =
    "a list of frame numbers from 0 or ranges of them, as in [3, 17, 20-24]";

Boundary boundary_of(const YamlValue& value) {
  return word_of(value, {"closed", "open"}) == "open" ? Boundary::open : Boundary::closed;
}

/// Throws Problem for numbers that are not whole numbers from 0 with first <= last.
std::vector<int> frames_of(const YamlValue& value) {
  std::vector<int> frames;
  for (const auto& item : list_of(value, frames_form)) {
    const auto ends = split(text_of(item, frames_form), '-');
    const auto first = parse_integer(ends.front());
    const auto last = parse_integer(ends.back());
    if (ends.size() > 2 || !first || !last || *first < 0 || *last < *first || *last > most_frames) {
      item.refuse(frames_form);
    }
    for (long long frame = *first; frame <= *last; ++frame) {
      frames.push_back(static_cast<int>(frame));
    }
    if (frames.size() > most_frames) item.refuse(frames_form);
  }
  std::sort(frames.begin(), frames.end());
  frames.erase(std::unique(frames.begin(), frames.end()), frames.end());
  return frames;
}

std::vector<double> times_of(const YamlValue& value) {
  std::vector<double> times;
  for (const auto& item : list_of(value, times_form)) {
    times.push_back(number_of(item, -most_minutes, most_minutes, times_form));
  }
  return times;
}

/// One column of minutes; a first row that is no number is its heading.
std::vector<double> times_in(const std::filesystem::path& file) {
  CsvReader reader(file);
  std::vector<double> times;
  bool first = true;
  for (std::vector<std::string> cells; reader.next(cells); first = false) {
    const auto minutes = parse_number(cells.front());
    if (!minutes && first) continue;
    if (!minutes || cells.size() > 1) {
      throw Problem("The times file " + file.filename().string() + ", line " +
                    std::to_string(reader.line()) +
                    ", must hold one column with one number of minutes a frame, not " +
                    in_quotes(joined(cells, ",")) + ".");
    }
    times.push_back(*minutes);
  }
  if (times.empty()) {
    throw Problem("The times file " + file.filename().string() +
                  " holds no times; write one number of minutes a frame.");
  }
  return times;
}

std::string order_of(const YamlValue& value) {
  constexpr const char* form =
      "letters of T (time), C (imaging channel) and Z, each once, the fastest first, as in CZT";
  std::string order = text_of(value, form);
  for (char& letter : order) letter = static_cast<char>(letter & ~0x20);
  std::string sorted = order;
  std::sort(sorted.begin(), sorted.end());
  const bool twice = std::adjacent_find(sorted.begin(), sorted.end()) != sorted.end();
  if (twice || sorted.find_first_not_of("CTZ") != std::string::npos) value.refuse(form);
  return order;
}

std::vector<std::string> channels_of(const YamlValue& value) {
  constexpr const char* form = "a list of imaging-channel names, each another, as in [NLS, DIC]";
  std::vector<std::string> names;
  for (const auto& item : list_of(value, form)) names.push_back(text_of(item, form));
  if (std::set<std::string>(names.begin(), names.end()).size() != names.size() ||
      names.size() > 100) {
    value.refuse(form);
  }
  return names;
}

using Keep = std::function<void(Sidecar&, const YamlValue&)>;

double positive(const YamlValue& value, double highest, const char* must_be) {
  constexpr double smallest = 1e-6;
  return number_of(value, smallest, highest, must_be);
}

std::map<std::string, Keep> scale_keys() {
  return {
      {"pixel_size_um",
       [](Sidecar& s, const YamlValue& v) {
         s.pixel_um = positive(v, 1000, "a number of µm a pixel above 0, as in 0.65");
       }},
      {"frame_interval_min",
       [](Sidecar& s, const YamlValue& v) {
         s.interval_min = positive(v, 1e5, "a number of minutes above 0, as in 1.5");
       }},
      {"times_min",
       [](Sidecar& s, const YamlValue& v) {
         s.times_min = times_of(v);
         s.times_key = "times_min";
       }},
      {"times_file",
       [](Sidecar& s, const YamlValue& v) {
         s.times_file =
             s.file.parent_path() / text_of(v, "the name of a CSV file with one column of minutes");
         s.times_key = "times_file";
       }},
      {"channels", [](Sidecar& s, const YamlValue& v) { s.channels = channels_of(v); }},
      {"order", [](Sidecar& s, const YamlValue& v) { s.order = order_of(v); }},
      {"z_planes",
       [](Sidecar& s, const YamlValue& v) {
         s.z_planes = integer_of(v, 1, 10000, "a whole number of planes from 1");
       }},
  };
}

std::map<std::string, Keep> camera_keys() {
  return {
      {"optics",
       [](Sidecar& s, const YamlValue& v) {
         const bool sectioned = word_of(v, {"widefield", "sectioned"}) == "sectioned";
         s.optics = sectioned ? Optics::sectioned : Optics::widefield;
       }},
      {"bit_depth",
       [](Sidecar& s, const YamlValue& v) {
         s.bit_depth = integer_of(v, 1, 32, "the camera's whole number of bits, 1 to 32");
       }},
      {"gain_electrons_per_count",
       [](Sidecar& s, const YamlValue& v) {
         s.camera.gain_electrons_per_count =
             positive(v, 1e6, "a number of electrons a count above 0, as in 0.46");
       }},
      {"read_noise_electrons",
       [](Sidecar& s, const YamlValue& v) {
         s.camera.read_noise_electrons =
             number_of(v, 0, 1e6, "a number of electrons from 0, as in 1.6");
       }},
      {"dark_offset_counts",
       [](Sidecar& s, const YamlValue& v) {
         s.camera.dark_offset_counts = number_of(v, -1e9, 1e9, "a number of counts, as in 100");
       }},
  };
}

std::map<std::string, Keep> override_keys() {
  constexpr const char* minutes = "a number of minutes since the first frame, as in 42";
  return {
      {"tube_width_um",
       [](Sidecar& s, const YamlValue& v) {
         s.overrides.tube_width_um = positive(v, 1e5, "a number of µm above 0, as in 120");
       }},
      {"left_end", [](Sidecar& s, const YamlValue& v) { s.overrides.left_end = boundary_of(v); }},
      {"right_end", [](Sidecar& s, const YamlValue& v) { s.overrides.right_end = boundary_of(v); }},
      {"upper_wall",
       [](Sidecar& s, const YamlValue& v) { s.overrides.upper_wall = boundary_of(v); }},
      {"lower_wall",
       [](Sidecar& s, const YamlValue& v) { s.overrides.lower_wall = boundary_of(v); }},
      {"outline", [](Sidecar& s, const YamlValue& v) { s.overrides.outline_um = polygon_of(v); }},
      {"exclude_frames",
       [](Sidecar& s, const YamlValue& v) { s.overrides.exclude_frames = frames_of(v); }},
      {"exclude", [](Sidecar& s, const YamlValue& v) { s.overrides.exclude_um = polygons_of(v); }},
      {"first_healthy_min",
       [](Sidecar& s, const YamlValue& v) {
         s.overrides.first_healthy_min = number_of(v, -most_minutes, most_minutes, minutes);
       }},
      {"last_healthy_min",
       [](Sidecar& s, const YamlValue& v) {
         s.overrides.last_healthy_min = number_of(v, -most_minutes, most_minutes, minutes);
       }},
  };
}

const std::map<std::string, Keep>& known_keys() {
  static const std::map<std::string, Keep> keys = [] {
    auto all = scale_keys();
    all.merge(camera_keys());
    all.merge(override_keys());
    return all;
  }();
  return keys;
}

/// Insertions, deletions and replacements that turn one word into the other (Levenshtein 1966).
std::size_t edit_distance(const std::string& from, const std::string& to) {
  std::vector<std::size_t> row(to.size() + 1);
  std::iota(row.begin(), row.end(), std::size_t{0});
  for (std::size_t i = 1; i <= from.size(); ++i) {
    std::size_t diagonal = row[0];
    row[0] = i;
    for (std::size_t j = 1; j <= to.size(); ++j) {
      const std::size_t replaced = diagonal + (from[i - 1] == to[j - 1] ? 0 : 1);
      diagonal = row[j];
      row[j] = std::min({replaced, row[j] + 1, row[j - 1] + 1});
    }
  }
  return row.back();
}

std::string nearest_key(const std::string& word) {
  const auto nearer = [&](const auto& left, const auto& right) {
    return edit_distance(word, left.first) < edit_distance(word, right.first);
  };
  return std::min_element(known_keys().begin(), known_keys().end(), nearer)->first;
}

void note_unknown(Sidecar& sidecar, const YamlValue& value) {
  sidecar.notes.push_back("The sidecar " + value.file + ", line " + std::to_string(value.line) +
                          ", has the unknown key " + in_quotes(value.key) +
                          ", which was left out; the nearest known key is " +
                          nearest_key(lower_case(value.key.substr(0, 60))) + ".");
}

void refuse_contradictions(const Sidecar& sidecar, const std::set<std::string>& keys) {
  const std::string name = "The sidecar " + sidecar.file.filename().string();
  const auto stamps =
      keys.count("times_min") + keys.count("times_file") + keys.count("frame_interval_min");
  if (stamps > 1) {
    throw Problem(name +
                  " gives times in two ways; keep one of frame_interval_min, times_min and "
                  "times_file.");
  }
  const auto& healthy = sidecar.overrides;
  if (healthy.first_healthy_min && healthy.last_healthy_min &&
      *healthy.first_healthy_min >= *healthy.last_healthy_min) {
    throw Problem(name + " gives a last_healthy_min that is not after first_healthy_min.");
  }
}

}  // namespace

Sidecar read_sidecar(const std::filesystem::path& file) {
  Sidecar sidecar;
  sidecar.file = file;
  std::error_code ignored;
  sidecar.present = std::filesystem::exists(file, ignored);
  if (!sidecar.present) return sidecar;
  const YAML::Node root = load_yaml(file);
  if (root.IsNull()) return sidecar;
  const std::string name = file.filename().string();
  if (!root.IsMap()) {
    throw Problem("The sidecar " + name +
                  " must hold lines of the form \"key: value\", as in \"pixel_size_um: 0.65\".");
  }
  std::set<std::string> seen;
  for (const auto& entry : root) {
    const YamlValue value{name, entry.first.IsScalar() ? entry.first.Scalar() : "", entry.second,
                          entry.first.Mark().line + 1};
    if (!seen.insert(value.key).second) {
      throw Problem("The sidecar " + name + " gives " + in_quotes(value.key) +
                    " twice; keep one of the lines.");
    }
    const auto known = known_keys().find(value.key);
    if (known == known_keys().end()) {
      note_unknown(sidecar, value);
    } else {
      known->second(sidecar, value);
    }
  }
  refuse_contradictions(sidecar, seen);
  if (!sidecar.times_file.empty()) sidecar.times_min = times_in(sidecar.times_file);
  return sidecar;
}

}  // namespace wavefount
