#include "wavefount/acquisition/ome_writer.h"

#include <xxhash.h>

#include <array>
#include <cstdio>
#include <map>
#include <pugixml.hpp>
#include <sstream>

#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

const char* pixel_type(PixelFormat format) {
  switch (format) {
    case PixelFormat::unsigned8:
      return "uint8";
    case PixelFormat::packed12:
    case PixelFormat::unsigned16:
      return "uint16";
    case PixelFormat::unsigned32:
      return "uint32";
    case PixelFormat::float32:
      return "float";
  }
  return "uint16";
}

int format_bits(const OmeImage& image) {
  if (image.significant_bits > 0) return image.significant_bits;
  switch (image.format) {
    case PixelFormat::unsigned8:
      return 8;
    case PixelFormat::packed12:
      return 12;
    case PixelFormat::unsigned16:
      return 16;
    default:
      return 32;
  }
}

double units_per_minute(const std::string& unit) {
  if (unit == "ms") return 60000;
  if (unit == "s") return 60;
  if (unit == "min") return 1;
  if (unit == "h") return 1.0 / 60;
  throw Problem("OME-XML is written with times in ms, s, min or h, not in \"" + unit + "\".");
}

int plane_count(const OmeImage& image) {
  return image.frames * image.z_planes * static_cast<int>(image.channels.size());
}

/// Index of plane `plane` along each of C, Z and T.
std::map<char, int> place_of(const OmeImage& image, int plane) {
  const std::map<char, int> sizes = {
      {'C', static_cast<int>(image.channels.size())}, {'Z', image.z_planes}, {'T', image.frames}};
  std::map<char, int> place;
  for (const char dimension : image.order.substr(2)) {
    const int size = sizes.at(dimension);
    place[dimension] = plane % size;
    plane /= size;
  }
  return place;
}

void refuse_contradictions(const OmeImage& image) {
  static const std::array<const char*, 6> orders = {"XYCZT", "XYCTZ", "XYZCT",
                                                    "XYZTC", "XYTCZ", "XYTZC"};
  bool known = false;
  for (const char* order : orders) known = known || image.order == order;
  if (!known) throw Problem("\"" + image.order + "\" is no dimension order of OME-XML.");
  if (image.frames < 1 || image.z_planes < 1 || image.channels.empty()) {
    throw Problem("An OME image needs at least one frame, one plane and one channel.");
  }
  if (!image.delta_min.empty() && static_cast<int>(image.delta_min.size()) != image.frames) {
    throw Problem("An OME image needs as many times as it has frames.");
  }
  int listed = 0;
  for (const auto& file : image.files) listed += file.planes;
  if (!image.files.empty() && listed != plane_count(image)) {
    throw Problem("The files of an OME image must hold all of its planes.");
  }
}

pugi::xml_node add_tiff_data(pugi::xml_node pixels, const OmeImage& image, int first_plane,
                             int directory, int planes) {
  auto place = place_of(image, first_plane);
  auto data = pixels.append_child("TiffData");
  data.append_attribute("IFD") = directory;
  data.append_attribute("FirstC") = place['C'];
  data.append_attribute("FirstZ") = place['Z'];
  data.append_attribute("FirstT") = place['T'];
  data.append_attribute("PlaneCount") = planes;
  return data;
}

/// `used`: directories already taken in each file by earlier images.
void add_files(pugi::xml_node pixels, const OmeImage& image, const std::string& own_name,
               std::map<std::string, int>& used) {
  if (image.files.empty()) {
    add_tiff_data(pixels, image, 0, used[own_name], plane_count(image));
    used[own_name] += plane_count(image);
    return;
  }
  int plane = 0;
  for (const auto& file : image.files) {
    auto data = add_tiff_data(pixels, image, plane, used[file.name], file.planes);
    auto uuid = data.append_child("UUID");
    uuid.append_attribute("FileName") = file.name.c_str();
    uuid.text() = ome_uuid(file.name).c_str();
    used[file.name] += file.planes;
    plane += file.planes;
  }
}

void add_planes(pugi::xml_node pixels, const OmeImage& image) {
  if (image.delta_min.empty() && image.exposure_min <= 0) return;
  const double scale = units_per_minute(image.time_unit);
  for (int i = 0; i < plane_count(image); ++i) {
    auto place = place_of(image, i);
    auto plane = pixels.append_child("Plane");
    plane.append_attribute("TheC") = place['C'];
    plane.append_attribute("TheZ") = place['Z'];
    plane.append_attribute("TheT") = place['T'];
    if (!image.delta_min.empty()) {
      const double delta = image.delta_min[static_cast<std::size_t>(place['T'])] * scale;
      plane.append_attribute("DeltaT") = number_text(delta).c_str();
      plane.append_attribute("DeltaTUnit") = image.time_unit.c_str();
    }
    if (image.exposure_min > 0) {
      plane.append_attribute("ExposureTime") = number_text(image.exposure_min * scale).c_str();
      plane.append_attribute("ExposureTimeUnit") = image.time_unit.c_str();
    }
  }
}

void add_scale(pugi::xml_node pixels, const OmeImage& image) {
  if (image.pixel_um > 0) {
    for (const char* axis : {"X", "Y"}) {
      const std::string name = std::string("PhysicalSize") + axis;
      pixels.append_attribute(name.c_str()) = number_text(image.pixel_um).c_str();
      pixels.append_attribute((name + "Unit").c_str()) = "µm";
    }
  }
  if (image.interval_min > 0) {
    const double increment = image.interval_min * units_per_minute(image.time_unit);
    pixels.append_attribute("TimeIncrement") = number_text(increment).c_str();
    pixels.append_attribute("TimeIncrementUnit") = image.time_unit.c_str();
  }
}

void add_image(pugi::xml_node root, const OmeImage& image, int index, const std::string& own_name,
               std::map<std::string, int>& used) {
  const std::string number = std::to_string(index);
  auto node = root.append_child("Image");
  node.append_attribute("ID") = ("Image:" + number).c_str();
  node.append_attribute("Name") = image.name.c_str();
  auto pixels = node.append_child("Pixels");
  pixels.append_attribute("ID") = ("Pixels:" + number).c_str();
  pixels.append_attribute("DimensionOrder") = image.order.c_str();
  pixels.append_attribute("Type") = pixel_type(image.format);
  pixels.append_attribute("SignificantBits") = format_bits(image);
  pixels.append_attribute("SizeX") = image.width;
  pixels.append_attribute("SizeY") = image.height;
  pixels.append_attribute("SizeC") = static_cast<int>(image.channels.size());
  pixels.append_attribute("SizeZ") = image.z_planes;
  pixels.append_attribute("SizeT") = image.frames;
  add_scale(pixels, image);
  for (std::size_t c = 0; c < image.channels.size(); ++c) {
    auto channel = pixels.append_child("Channel");
    channel.append_attribute("ID") = ("Channel:" + number + ":" + std::to_string(c)).c_str();
    channel.append_attribute("Name") = image.channels[c].c_str();
    channel.append_attribute("SamplesPerPixel") = 1;
  }
  add_files(pixels, image, own_name, used);
  add_planes(pixels, image);
}

}  // namespace

std::string ome_uuid(const std::string& file_name) {
  const XXH128_hash_t hash = XXH3_128bits(file_name.data(), file_name.size());
  constexpr std::uint64_t version_8 = 0x8000, variant_rfc = std::uint64_t{2} << 62U;
  const std::uint64_t high = (hash.high64 & ~std::uint64_t{0xF000}) | version_8;
  const std::uint64_t low = (hash.low64 & (~std::uint64_t{0} >> 2U)) | variant_rfc;
  std::array<char, 64> text{};
  std::snprintf(text.data(), text.size(), "urn:uuid:%08llx-%04llx-%04llx-%04llx-%012llx",
                static_cast<unsigned long long>(high >> 32U),
                static_cast<unsigned long long>((high >> 16U) & 0xFFFFU),
                static_cast<unsigned long long>(high & 0xFFFFU),
                static_cast<unsigned long long>(low >> 48U),
                static_cast<unsigned long long>(low & 0xFFFFFFFFFFFFU));
  return text.data();
}

std::string ome_xml(const std::string& file_name, const std::vector<OmeImage>& images) {
  pugi::xml_document document;
  auto declaration = document.append_child(pugi::node_declaration);
  declaration.append_attribute("version") = "1.0";
  declaration.append_attribute("encoding") = "UTF-8";
  auto root = document.append_child("OME");
  root.append_attribute("xmlns") = "http://www.openmicroscopy.org/Schemas/OME/2016-06";
  root.append_attribute("xmlns:xsi") = "http://www.w3.org/2001/XMLSchema-instance";
  root.append_attribute("xsi:schemaLocation") =
      "http://www.openmicroscopy.org/Schemas/OME/2016-06 "
      "http://www.openmicroscopy.org/Schemas/OME/2016-06/ome.xsd";
  root.append_attribute("UUID") = ome_uuid(file_name).c_str();
  std::map<std::string, int> used;
  for (std::size_t i = 0; i < images.size(); ++i) {
    refuse_contradictions(images[i]);
    add_image(root, images[i], static_cast<int>(i), file_name, used);
  }
  std::ostringstream text;
  document.save(text, "", pugi::format_raw);
  return text.str();
}

}  // namespace wavefount
