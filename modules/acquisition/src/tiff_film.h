#pragma once

#include <memory>

#include "plane_table.h"
#include "wavefount/core/film.h"

namespace wavefount {

/// A film whose planes are pages of TIFFs.
class TiffFilm : public FrameSource {
 public:
  /// The table must hold as many frames and channels as the description says.
  TiffFilm(FilmDescription description, PlaneTable table);

  const FilmDescription& description() const override { return description_; }
  std::unique_ptr<FrameReader> reader() const override;

 private:
  FilmDescription description_;
  std::shared_ptr<const PlaneTable> table_;
};

/// Leaves out frames at the end whose compressed pixels break off, found by decoding backwards from
/// the last one; where a file was cut inside its last pages its directories do not tell. Throws
/// Problem when no frame is left.
void drop_broken_end(PlaneTable& table);

}  // namespace wavefount
