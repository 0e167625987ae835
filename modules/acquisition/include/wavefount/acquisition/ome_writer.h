#pragma once

#include <string>
#include <vector>

#include "wavefount/acquisition/tiff_writer.h"

namespace wavefount {

/// One file of a multi-file OME-TIFF set, and how many planes of the image it holds.
struct OmeFile {
  std::string name;  ///< file name without folder
  int planes = 0;    ///< the next ones in dimension order
};

/// One image (position) of an OME-TIFF.
struct OmeImage {
  std::string name;
  int width = 0;
  int height = 0;
  int frames = 1;
  int z_planes = 1;
  std::vector<std::string> channels = {"reporter"};
  std::string order = "XYCZT";  ///< fastest dimension first
  PixelFormat format = PixelFormat::unsigned16;
  int significant_bits = 0;       ///< 0: all of the format
  double pixel_um = 0;            ///< 0: not written
  double interval_min = 0;        ///< TimeIncrement; 0: not written
  double exposure_min = 0;        ///< ExposureTime of each plane; 0: not written
  std::vector<double> delta_min;  ///< DeltaT, one a frame; empty: not written
  std::string time_unit = "s";    ///< ms, s, min or h
  std::vector<OmeFile> files;     ///< empty: all planes lie in the one file that holds the text
};

/// A UUID that follows from the name alone (version 8, RFC 9562), so that the same film gets the
/// same bytes.
std::string ome_uuid(const std::string& file_name);

/// OME-XML (schema 2016-06) for the first page of `file_name`. The images' planes follow each other
/// in the file. Throws Problem where order or sizes contradict each other.
std::string ome_xml(const std::string& file_name, const std::vector<OmeImage>& images);

}  // namespace wavefount
