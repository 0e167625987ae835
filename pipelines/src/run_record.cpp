#include "run_record.h"

#include <itkVersion.h>
#include <xxhash.h>

#include <Eigen/Core>
#include <chrono>
#include <cstdio>
#include <ctime>
#include <fstream>
#include <nlohmann/json.hpp>
#include <opencv2/core/version.hpp>

#include "run_folder.h"
#include "wavefount/acquisition/checksum.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/random.h"
#include "wavefount/core/version.h"

namespace wavefount {
namespace {

using Json = nlohmann::ordered_json;

template <class Value>
Json or_null(const std::optional<Value>& value) {
  return value ? Json(*value) : Json(nullptr);
}

template <class Steps>
void add_steps(Json& list, const Steps& steps) {
  for (const auto& step : steps)
    list.push_back({{"step", step->declaration().name}, {"parameters", step->parameters().all()}});
}

Json steps_as_used(const Pipeline& pipeline) {
  Json list = Json::array();
  add_steps(list, pipeline.before);
  add_steps(list, pipeline.stream);
  add_steps(list, pipeline.after);
  return list;
}

Json files_of(const FilmDescription& film, bool with_checksum) {
  Json list = Json::array();
  for (const auto& file : film.files) {
    Json one = {{"file", file.path.filename().string()},
                {"bytes", file.bytes},
                {"modified_ns", file.modified_ns}};
    if (with_checksum) one["xxh3_128"] = file.checksum;
    list.push_back(std::move(one));
  }
  return list;
}

Json polygon_json(const Polygon& polygon) {
  Json points = Json::array();
  for (const auto& point : polygon) points.push_back({point.x, point.y});
  return points;
}

const char* boundary_name(Boundary boundary) {
  return boundary == Boundary::open ? "open" : "closed";
}

Json overrides_of(const FilmOverrides& overrides) {
  Json json = {{"tube_width_um", or_null(overrides.tube_width_um)},
               {"first_healthy_min", or_null(overrides.first_healthy_min)},
               {"last_healthy_min", or_null(overrides.last_healthy_min)},
               {"exclude_frames", overrides.exclude_frames},
               {"outline_um", polygon_json(overrides.outline_um)}};
  const auto add = [&](const char* key, const std::optional<Boundary>& boundary) {
    json[key] = boundary ? Json(boundary_name(*boundary)) : Json(nullptr);
  };
  add("left_end", overrides.left_end);
  add("right_end", overrides.right_end);
  add("upper_wall", overrides.upper_wall);
  add("lower_wall", overrides.lower_wall);
  json["exclude_um"] = Json::array();
  for (const auto& polygon : overrides.exclude_um)
    json["exclude_um"].push_back(polygon_json(polygon));
  return json;
}

/// What was understood of the film before its pixels were read.
Json film_json(const FilmDescription& film) {
  return {{"name", film.name},
          {"width_px", film.width},
          {"height_px", film.height},
          {"frames", film.frames},
          {"z_planes", film.z_planes},
          {"channels", film.channels},
          {"reporter", film.reporter + 1},
          {"brightfield", film.brightfield + 1},
          {"field", film.field + 1},
          {"bit_depth", film.bit_depth},
          {"pixel_um", film.pixel_um},
          {"times_min", film.times_min},
          {"exposure_min", film.exposure_min},
          {"optics", film.optics == Optics::sectioned ? "sectioned" : "widefield"},
          {"gain_electrons_per_count", or_null(film.camera.gain_electrons_per_count)},
          {"read_noise_electrons", or_null(film.camera.read_noise_electrons)},
          {"dark_offset_counts", or_null(film.camera.dark_offset_counts)},
          {"overrides", overrides_of(film.overrides)}};
}

Json versions() {
  return {
      {"wavefount", WAVEFOUNT_VERSION},
      {"plugin_abi", WAVEFOUNT_ABI},
      {"itk", ITK_VERSION_STRING},
      {"opencv", CV_VERSION},
      {"eigen", std::to_string(EIGEN_WORLD_VERSION) + "." + std::to_string(EIGEN_MAJOR_VERSION) +
                    "." + std::to_string(EIGEN_MINOR_VERSION)}};
}

std::string text_digest(const std::string& text) {
  const auto hash = XXH3_128bits(text.data(), text.size());
  char digits[33];
  std::snprintf(digits, sizeof digits, "%016llx%016llx",
                static_cast<unsigned long long>(hash.high64),
                static_cast<unsigned long long>(hash.low64));
  return digits;
}

std::string utc_now() {
  const std::time_t now = std::chrono::system_clock::to_time_t(std::chrono::system_clock::now());
  std::tm parts{};
  gmtime_r(&now, &parts);
  char text[32];
  std::strftime(text, sizeof text, "%Y-%m-%dT%H:%M:%SZ", &parts);
  return text;
}

Json timings(const std::vector<std::pair<std::string, double>>& stage_seconds) {
  Json stages = Json::object();
  for (const auto& [stage, seconds] : stage_seconds) stages[stage] = seconds;
  return {{"written_at", utc_now()}, {"busy_seconds", stages}};
}

Json messages_json(const Messages& messages) {
  Json list = Json::array();
  for (const auto& message : messages.all())
    list.push_back({{"severity", message.severity == Severity::warning ? "warning" : "note"},
                    {"text", message.text}});
  return list;
}

}  // namespace

std::string fingerprint_of(const FilmDescription& film, const Pipeline& pipeline) {
  const Json seen = {{"abi", WAVEFOUNT_ABI},
                     {"seed", pipeline.file.seed},
                     {"steps", steps_as_used(pipeline)},
                     {"film", film_json(film)},
                     {"files", files_of(film, false)}};
  return text_digest(seen.dump(-1, ' ', false, Json::error_handler_t::replace));
}

void write_run_record(const std::filesystem::path& file, const RunRecord& record) {
  const auto& pipeline = record.pipeline.file;
  const Json json = {{"acquisition", record.acquisition},
                     {"status", "done"},
                     {"notice", "Research use only, not for diagnosis."},
                     {"film_acquisitions", record.film_acquisitions},
                     {"fingerprint", record.fingerprint},
                     {"files", files_of(record.film, true)},
                     {"film", film_json(record.film)},
                     {"sheet", record.film.sheet},
                     {"pipeline", {{"name", pipeline.name}, {"text", pipeline.text}}},
                     {"steps", steps_as_used(record.pipeline)},
                     {"seeds",
                      {{"pipeline", pipeline.seed},
                       {"film", std::to_string(seed_from(pipeline.seed, record.film.name))}}},
                     {"versions", versions()},
                     {"messages", messages_json(record.messages)},
                     {"message", record.messages.summary()},
                     {"timings", timings(record.stage_seconds)}};
  std::ofstream out(file);
  out << json.dump(2, ' ', false, Json::error_handler_t::replace) << '\n' << std::flush;
  if (!out)
    throw Problem("The record " + file.string() +
                  " cannot be written; free space on that disk or choose another --out.");
}

std::optional<EarlierResult> read_earlier_result(const std::filesystem::path& folder) {
  std::ifstream in(folder / record_file_name);
  if (!in) return std::nullopt;
  const auto json = Json::parse(in, nullptr, false);
  try {
    return EarlierResult{json.at("film_acquisitions").get<std::vector<std::string>>(),
                         json.at("fingerprint").get<std::string>(),
                         json.at("message").get<std::string>()};
  } catch (const nlohmann::json::exception&) {
    return std::nullopt;  // not a record of ours: measured again
  }
}

void add_checksums(FilmDescription& film) {
  for (auto& file : film.files) file.checksum = checksum(file.path);
}

}  // namespace wavefount
