#pragma once

#include <filesystem>
#include <string>
#include <vector>

#include "ome_metadata.h"
#include "tiff_index.h"

namespace wavefount {

/// One plane of a film and where its pixels lie.
struct Plane {
  int file = -1;   ///< index into PlaneTable::files; -1: nowhere
  int number = 0;  ///< of the page in its file, from 1
  TiffPage page;   ///< TiffPage::problem is set as well where the plane lies nowhere
};

/// Which page of which file is which plane of a film.
struct PlaneTable {
  int frames = 0;
  int channels = 1;
  int z_planes = 1;
  std::vector<std::filesystem::path> files;
  std::vector<Plane> planes;  ///< at ((frame · channels) + channel) · z_planes + z
  std::vector<int> unusable;  ///< frames amid the film that are damaged
  bool cut = false;           ///< frames at the end were left out
  std::string description;    ///< of the first page of the first file
  std::vector<std::string> notes;

  const Plane& at(int frame, int channel, int z) const;
  Plane& at(int frame, int channel, int z);
};

/// How many imaging channels and z planes a film has, and how its planes follow each other.
struct PlaneOrder {
  int channels = 1;
  int z_planes = 1;
  std::string letters = "CZT";  ///< fastest first, all three
};

/// The pages of the files, one after the other, as a film. Throws Problem where the order cannot be
/// followed.
PlaneTable planes_in_order(const std::vector<std::filesystem::path>& files,
                           const PlaneOrder& order);

/// The planes of one image of an OME-XML found in `own`.
PlaneTable planes_of_series(const OmeMetadata& metadata, int image,
                            const std::filesystem::path& own);

/// Leaves out the end of the film from the first frame on after which none is whole, and marks
/// damaged frames amid it. Throws Problem when no frame is left, or frames amid the film differ in
/// size.
void keep_whole_frames(PlaneTable& table);

}  // namespace wavefount
