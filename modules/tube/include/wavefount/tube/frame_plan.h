#pragma once

#include <filesystem>
#include <memory>
#include <string>
#include <vector>

#include "wavefount/core/film.h"
#include "wavefount/core/observations.h"
#include "wavefount/core/prescan.h"
#include "wavefount/core/reduced_film.h"
#include "wavefount/core/tube.h"
#include "wavefount/tube/shift.h"

namespace wavefount::tube {

/// Reduced pixels first <= x < last of row y of the crop.
struct Span {
  int y = 0;
  int first = 0;
  int last = 0;
};

/// What the frame steps work by, made once a film.
struct FramePlan {
  static constexpr const char* record_name = "frame-plan";

  /// Pixels inside the tubes and outside their holes, in the place of the first frame.
  std::vector<Span> inside;
  std::vector<int> keyframes;        ///< frame numbers of the prescan
  std::vector<double> key_x, key_y;  ///< their shifts, reduced pixels
  std::vector<double> key_light;     ///< their mean inside the tubes, counts
  double dark_counts = 0;            ///< level that counts as no light
  double saturation_counts = 0;
  double pixel_um = 1;
  double blob_px = 1;                        ///< diameter of the largest nucleus, reduced pixels
  std::unique_ptr<ShiftReference> standing;  ///< median image: what stands still
  std::unique_ptr<ShiftReference> coarse;    ///< its thumbnail without nuclei
  double expected_agreement = 1;             ///< of faultless frames with `standing`
  std::vector<ShiftReference> keys;          ///< each keyframe for itself, nuclei included
};

/// Where the work file's crop lies, and what values it must hold.
struct CropPlan {
  int left = 0, top = 0;      ///< full-size pixels
  int width = 0, height = 0;  ///< reduced pixels
  double lowest = 0, highest = 65535;
};

/// Tubes, a margin for what lies around them, and the drift seen ahead. Value range with headroom
/// for nuclei that fill later: 16-bit steps stay below a tenth of a count's noise for integer
/// films.
CropPlan plan_crop(const FilmDescription& film, const Prescan& prescan, const Tubes& tubes,
                   double margin_um);

/// The work file is `scratch`/reduced.bin. Throws Problem when it cannot be made.
std::shared_ptr<ReducedFilm> make_reduced_film(const FilmDescription& film, const Prescan& prescan,
                                               const CropPlan& crop,
                                               const std::filesystem::path& scratch);

FramePlan plan_frames(const FilmDescription& film, const Prescan& prescan,
                      const CameraModel& camera, const Tubes& tubes, const ReducedFilm& reduced,
                      double largest_radius_um);

/// Shift expected of a frame between two keyframes, reduced pixels.
struct ExpectedShift {
  double x = 0, y = 0;
  std::size_t before = 0, after = 0;  ///< positions in FramePlan::keyframes
  double after_share = 0;             ///< weight of `after`, 0 to 1
};
ExpectedShift expected_shift(const FramePlan& plan, int frame);

/// Reduces one frame within the crop of `film`, judges it, and fills light, saturation and
/// sharpness of `observation`. Values that are not finite are set to the middle of the others, in
/// `pixels` too.
ImagePointer reduce_frame(Image& pixels, const ReducedFilm& film, const FramePlan& plan,
                          FrameObservation& observation);

/// Shift of a reduced frame, into `observation`: against the median image of the prescan; in a
/// direction of which nothing that stands still tells, by the nuclei of the two nearest keyframes,
/// weighted by distance in time, if nearly all of them agree; else no change.
void register_frame(const Image& reduced, const FramePlan& plan, int factor,
                    FrameObservation& observation);

}  // namespace wavefount::tube
