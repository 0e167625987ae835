#pragma once

#include <memory>
#include <string>
#include <vector>

#include "wavefount/acquisition/listing.h"
#include "wavefount/core/film.h"

namespace wavefount {

/// Understands a film from its metadata and sidecar (which wins). Throws Problem: what is missing
/// or wrong, and which line to write into which sidecar. Checksums of the files are left empty.
std::shared_ptr<const FrameSource> open_film(const FoundFilm& film, const ChannelRoles& roles);

/// What was understood of the film, one sentence each.
std::vector<std::string> understood(const FilmDescription& film);

}  // namespace wavefount
