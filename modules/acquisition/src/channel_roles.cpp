#include "channel_roles.h"

#include <algorithm>

#include "utf8.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

/// By name, else by name in any case, else by number from 1; -1 when there is none.
int find_channel(const std::vector<std::string>& channels, const std::string& wanted) {
  const auto position = [&](auto matches) {
    const auto found = std::find_if(channels.begin(), channels.end(), matches);
    return found == channels.end() ? -1 : static_cast<int>(found - channels.begin());
  };
  int index = position([&](const std::string& name) { return name == wanted; });
  if (index >= 0) return index;
  index = position([&](const std::string& name) { return lower_case(name) == lower_case(wanted); });
  if (index >= 0) return index;
  const auto number = parse_integer(wanted);
  const bool inside = number && *number >= 1 && *number <= static_cast<int>(channels.size());
  return inside ? static_cast<int>(*number) - 1 : -1;
}

int side_channel(FilmDescription& film, const std::string& wanted, const char* role) {
  if (wanted.empty()) return -1;
  const int index = find_channel(film.channels, wanted);
  if (index < 0) {
    film.notes.push_back("The film has no imaging channel " + in_quotes(wanted) +
                         "; it was measured "
                         "without a " +
                         role + " channel.");
  }
  return index;
}

/// The channel that is left when the other parts are given away; -1 when several are.
int only_channel(const FilmDescription& film) {
  int found = -1;
  for (int i = 0; i < static_cast<int>(film.channels.size()); ++i) {
    if (i == film.brightfield || i == film.field) continue;
    if (found >= 0) return -1;
    found = i;
  }
  return found;
}

}  // namespace

void assign_roles(FilmDescription& film, const ChannelRoles& roles, const std::string& sidecar) {
  film.brightfield = side_channel(film, roles.brightfield, "brightfield");
  film.field = side_channel(film, roles.field, "field");
  film.reporter =
      roles.reporter.empty() ? only_channel(film) : find_channel(film.channels, roles.reporter);
  const std::string has =
      "The film " + film.name + " has the imaging channels " + joined(film.channels, ", ");
  if (film.reporter < 0 && roles.reporter.empty()) {
    throw Problem(has + "; name the one that nuclei import as reporter in the pipeline.");
  }
  if (film.reporter < 0) {
    throw Problem(has + ", none of which is the pipeline's reporter " + in_quotes(roles.reporter) +
                  "; correct the pipeline, or write \"channels: [" + roles.reporter + "]\" into " +
                  sidecar + " beside the film.");
  }
  const bool twice = film.reporter == film.brightfield || film.reporter == film.field ||
                     (film.field >= 0 && film.field == film.brightfield);
  if (twice) {
    throw Problem(has + ", and the pipeline gives one of them two parts; name another.");
  }
}

}  // namespace wavefount
