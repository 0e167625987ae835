#pragma once

#include <filesystem>
#include <optional>
#include <string>
#include <vector>

#include "wavefount/core/film.h"

namespace wavefount {

/// Planes that follow each other in one file.
struct OmeBlock {
  int first_c = 0, first_z = 0, first_t = 0;
  int directory = 0;      ///< page of the first plane, from 0
  int planes = 1;         ///< 0: all the rest
  std::string file_name;  ///< empty: the file that holds the XML
  std::string uuid;
};

struct OmePlane {
  int c = 0, z = 0, t = 0;
  std::optional<double> delta_min;
  std::optional<double> exposure_min;
};

/// One Image of an OME-XML.
struct OmeSeries {
  std::string name;
  int width = 0, height = 0;
  int frames = 1, channels = 1, z_planes = 1;
  std::string order = "CZT";  ///< fastest first
  std::optional<int> significant_bits;
  std::optional<double> pixel_x_um, pixel_y_um;
  std::optional<double> interval_min;
  std::optional<Optics> optics;
  std::vector<std::string> channel_names;  ///< as many as channels
  std::vector<OmeBlock> blocks;
  std::vector<OmePlane> planes;
};

struct OmeMetadata {
  std::string uuid;
  std::string metadata_file;  ///< set where only another file holds the metadata (BinaryOnly)
  std::vector<OmeSeries> series;
};

/// Whether a page's description is OME-XML.
bool is_ome_xml(const std::string& description);

/// Reads OME-XML of any schema version. External entities are not followed. Throws Problem that
/// names `file` when the text is no XML, has no image, or claims absurd sizes.
OmeMetadata parse_ome(const std::string& xml, const std::string& file);

}  // namespace wavefount
