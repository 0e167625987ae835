#include "ome_metadata.h"

#include <cstring>
#include <map>
#include <pugixml.hpp>

#include "utf8.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

constexpr std::size_t largest_xml = std::size_t{256} << 20U;
constexpr int most_planes = 4'000'000;

/// The node's name without a namespace prefix, which some writers add.
std::string_view local_name(const pugi::xml_node& node) {
  const std::string_view name = node.name();
  return name.substr(name.rfind(':') + 1);
}

pugi::xml_node child(const pugi::xml_node& node, std::string_view name) {
  return node.find_child([&](const pugi::xml_node& inner) { return local_name(inner) == name; });
}

template <class Action>
void for_children(const pugi::xml_node& node, std::string_view name, Action action) {
  for (const auto& inner : node.children()) {
    if (local_name(inner) == name) action(inner);
  }
}

/// A whole number from `lowest`; `otherwise` where the attribute is missing or anything else.
int whole(const pugi::xml_node& node, const char* name, int lowest, int otherwise) {
  const auto value = parse_integer(node.attribute(name).value());
  const bool usable = value && *value >= lowest && *value <= most_planes;
  return usable ? static_cast<int>(*value) : otherwise;
}

/// An attribute in its unit, turned into another by `factors`; empty where the value is no number
/// or the unit is not one of length or time (`pixel`, `reference frame`).
std::optional<double> measure(const pugi::xml_node& node, const std::string& name,
                              const std::map<std::string, double>& factors,
                              const char* usual_unit) {
  const auto value = parse_number(node.attribute(name.c_str()).value());
  if (!value) return std::nullopt;
  const auto unit = factors.find(node.attribute((name + "Unit").c_str()).as_string(usual_unit));
  if (unit == factors.end()) return std::nullopt;
  return *value * unit->second;
}

std::optional<double> minutes(const pugi::xml_node& node, const std::string& name) {
  static const std::map<std::string, double> factors = {
      {"h", 60},         {"min", 1},         {"s", 1.0 / 60},
      {"ms", 1.0 / 6e4}, {"µs", 1.0 / 6e7},  {"μs", 1.0 / 6e7},
      {"us", 1.0 / 6e7}, {"ns", 1.0 / 6e10}, {"d", 1440}};
  return measure(node, name, factors, "s");
}

std::optional<double> micrometres(const pugi::xml_node& node, const std::string& name) {
  static const std::map<std::string, double> factors = {
      {"µm", 1},   {"μm", 1},  {"um", 1},    {"micron", 1}, {"nm", 1e-3}, {"mm", 1e3},
      {"cm", 1e4}, {"m", 1e6}, {"pm", 1e-6}, {"Å", 1e-4},   {"Å", 1e-4},  {"in", 25400}};
  const auto value = measure(node, name, factors, "µm");
  return value && *value > 0 ? value : std::nullopt;
}

/// From how the channels were recorded, where the writer says so.
std::optional<Optics> optics_of(const pugi::xml_node& channel) {
  const std::string mode = channel.attribute("AcquisitionMode").value();
  if (mode == "WideField") return Optics::widefield;
  for (const char* sectioned : {"LaserScanningConfocalMicroscopy", "SpinningDiskConfocal",
                                "SlitScanConfocal", "MultiPhotonMicroscopy", "SPIM"}) {
    if (mode == sectioned) return Optics::sectioned;
  }
  return std::nullopt;
}

void read_channels(const pugi::xml_node& pixels, OmeSeries& series) {
  for_children(pixels, "Channel", [&](const pugi::xml_node& channel) {
    if (static_cast<int>(series.channel_names.size()) == series.channels) return;
    series.channel_names.push_back(trimmed(as_utf8(channel.attribute("Name").value())));
    if (!series.optics) series.optics = optics_of(channel);
  });
  series.channel_names.resize(static_cast<std::size_t>(series.channels));
  for (std::size_t c = 0; c < series.channel_names.size(); ++c) {
    auto& name = series.channel_names[c];
    if (name.empty()) name = "channel " + std::to_string(c + 1);
  }
}

OmeBlock block_of(const pugi::xml_node& data) {
  OmeBlock block;
  block.first_c = whole(data, "FirstC", 0, 0);
  block.first_z = whole(data, "FirstZ", 0, 0);
  block.first_t = whole(data, "FirstT", 0, 0);
  block.directory = whole(data, "IFD", 0, 0);
  // A page alone is one plane; neither page nor count stands for all that the file has.
  block.planes = whole(data, "PlaneCount", 0, data.attribute("IFD") ? 1 : 0);
  if (const auto uuid = child(data, "UUID")) {
    block.file_name = uuid.attribute("FileName").value();
    block.uuid = trimmed(uuid.text().get());
  }
  return block;
}

OmePlane plane_of(const pugi::xml_node& node) {
  return {whole(node, "TheC", 0, 0), whole(node, "TheZ", 0, 0), whole(node, "TheT", 0, 0),
          minutes(node, "DeltaT"), minutes(node, "ExposureTime")};
}

/// `XYCZT` without the first two letters; empty where it is none of the six orders.
std::string order_of(const pugi::xml_node& pixels) {
  const std::string order = pixels.attribute("DimensionOrder").as_string("XYCZT");
  const bool known = order.size() == 5 && order.starts_with("XY") &&
                     order.find('C') != std::string::npos && order.find('Z') != std::string::npos &&
                     order.find('T') != std::string::npos;
  return known ? order.substr(2) : "CZT";
}

OmeSeries series_of(const pugi::xml_node& image, const std::string& file) {
  const auto pixels = child(image, "Pixels");
  OmeSeries series;
  series.name = as_utf8(image.attribute("Name").value());
  series.width = whole(pixels, "SizeX", 1, 0);
  series.height = whole(pixels, "SizeY", 1, 0);
  series.frames = whole(pixels, "SizeT", 1, 0);
  series.channels = whole(pixels, "SizeC", 1, 0);
  series.z_planes = whole(pixels, "SizeZ", 1, 0);
  const double planes = double{1} * series.frames * series.channels * series.z_planes;
  if (planes < 1 || planes > most_planes || series.channels > 100) {
    throw Problem("The OME-XML of " + file +
                  " gives sizes in time, imaging channels or z that no " +
                  "film has; export the film again.");
  }
  series.order = order_of(pixels);
  series.significant_bits = whole(pixels, "SignificantBits", 1, 0);
  if (*series.significant_bits < 1 || *series.significant_bits > 32)
    series.significant_bits.reset();
  series.pixel_x_um = micrometres(pixels, "PhysicalSizeX");
  series.pixel_y_um = micrometres(pixels, "PhysicalSizeY");
  series.interval_min = minutes(pixels, "TimeIncrement");
  if (series.interval_min && !(*series.interval_min > 0)) series.interval_min.reset();
  read_channels(pixels, series);
  for_children(pixels, "TiffData",
               [&](const pugi::xml_node& data) { series.blocks.push_back(block_of(data)); });
  for_children(pixels, "Plane",
               [&](const pugi::xml_node& plane) { series.planes.push_back(plane_of(plane)); });
  return series;
}

}  // namespace

bool is_ome_xml(const std::string& description) {
  const std::string_view start = std::string_view(description).substr(0, 4096);
  return start.find("<OME") != std::string_view::npos ||
         start.find(":OME ") != std::string_view::npos;
}

OmeMetadata parse_ome(const std::string& xml, const std::string& file) {
  if (xml.size() > largest_xml) {
    throw Problem("The OME-XML of " + file + " is larger than 256 MiB; export the film again.");
  }
  pugi::xml_document document;
  const auto result =
      document.load_buffer(xml.data(), xml.size(), pugi::parse_default, pugi::encoding_utf8);
  const auto root = child(document, "OME");
  if (!result || !root) {
    throw Problem("The OME-XML of " + file + " cannot be read (" +
                  (result ? "it has no OME element" : result.description()) +
                  "); export the film again.");
  }
  OmeMetadata metadata;
  metadata.uuid = trimmed(root.attribute("UUID").value());
  metadata.metadata_file = child(root, "BinaryOnly").attribute("MetadataFile").value();
  for_children(root, "Image", [&](const pugi::xml_node& image) {
    if (child(image, "Pixels")) metadata.series.push_back(series_of(image, file));
  });
  if (metadata.series.empty() && metadata.metadata_file.empty()) {
    throw Problem("The OME-XML of " + file + " describes no image; export the film again.");
  }
  return metadata;
}

}  // namespace wavefount
