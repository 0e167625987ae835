#pragma once

#include <filesystem>
#include <map>
#include <string>
#include <vector>

namespace wavefount {

/// Which imaging channel plays which part: a channel's name, or its number from 1. Empty: not used;
/// an empty reporter is the only channel.
struct ChannelRoles {
  std::string reporter, brightfield, field;
};

enum class FilmKind {
  ome,    ///< OME-XML says which page of which file is which plane
  pages,  ///< the pages of one TIFF in order
  frames  ///< the single-page TIFFs of a folder in natural order
};

/// An acquisition in the folder, before it is opened.
struct FoundFilm {
  std::string name;  ///< as in the tables
  FilmKind kind = FilmKind::pages;
  std::filesystem::path source;   ///< the TIFF (of a set the one with the OME-XML) or the folder
  int image = 0;                  ///< of the OME-XML, from 0
  std::filesystem::path sidecar;  ///< where it lies, or would lie
  std::map<std::string, std::string> sheet;  ///< the acquisition's row, by column
  std::vector<std::string> sheet_columns;    ///< their order, without `acquisition`
  std::string problem;                       ///< empty, or why it cannot be opened
};

struct FolderListing {
  std::vector<FoundFilm> films;  ///< in natural order of their names
  /// Rows for one of several tubes of a film, by the tube's name (`FILM/tube-2`).
  std::map<std::string, std::map<std::string, std::string>> tube_rows;
  std::vector<std::string> sheet_columns;  ///< without `acquisition`
  std::vector<std::string> messages;       ///< about the folder, in sentences
};

/// Finds the acquisitions of a folder and joins the sheet `acquisitions.csv`; reads no pixels.
/// Throws Problem when the folder is not there, holds no acquisition, or the sheet cannot be read.
FolderListing list_films(const std::filesystem::path& folder);

}  // namespace wavefount
