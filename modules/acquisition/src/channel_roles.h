#pragma once

#include "wavefount/acquisition/listing.h"
#include "wavefount/core/film.h"

namespace wavefount {

/// Sets reporter, brightfield and field of a film whose channels are known. Throws Problem when the
/// reporter cannot be told or one channel would play two parts; a brightfield or field channel that
/// the film lacks becomes a note.
void assign_roles(FilmDescription& film, const ChannelRoles& roles, const std::string& sidecar);

}  // namespace wavefount
