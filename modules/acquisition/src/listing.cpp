#include "wavefount/acquisition/listing.h"

#include <algorithm>
#include <map>
#include <optional>
#include <set>

#include "frame_folder.h"
#include "ome_files.h"
#include "sheet.h"
#include "tiff_index.h"
#include "utf8.h"
#include "wavefount/core/problem.h"
#include "wavefount/core/text.h"

namespace wavefount {
namespace {

namespace fs = std::filesystem;

bool natural_path_less(const fs::path& left, const fs::path& right) {
  return natural_less(left.filename().string(), right.filename().string());
}

/// What lies in the folder, each kind in natural order; hidden entries left out.
struct Entries {
  std::vector<fs::path> tiffs, companions, folders, sidecars;
};

void sort_entry(const fs::directory_entry& entry, Entries& entries) {
  const std::string name = entry.path().filename().string();
  std::error_code ignored;
  if (name.starts_with('.')) return;
  if (entry.is_directory(ignored)) {
    entries.folders.push_back(entry.path());
  } else if (is_tiff_name(name)) {
    entries.tiffs.push_back(entry.path());
  } else if (is_companion_name(name)) {
    entries.companions.push_back(entry.path());
  } else if (name.ends_with(".yaml") || name.ends_with(".yml")) {
    entries.sidecars.push_back(entry.path());
  }
}

Entries entries_of(const fs::path& folder) {
  std::error_code error;
  if (!fs::exists(folder, error)) {
    throw Problem("There is no folder " + folder.string() + "; check its name.");
  }
  if (!fs::is_directory(folder, error)) {
    throw Problem(folder.string() + " is not a folder; give the folder that holds the films.");
  }
  Entries entries;
  fs::directory_iterator iterator(folder, error);
  if (error) {
    throw Problem("The folder " + folder.string() + " cannot be read: " + error.message() + ".");
  }
  for (const auto& entry : iterator) sort_entry(entry, entries);
  for (auto* kind : {&entries.tiffs, &entries.companions, &entries.folders, &entries.sidecars}) {
    std::sort(kind->begin(), kind->end(), natural_path_less);
  }
  return entries;
}

/// Finds the films of one folder.
class Finder {
 public:
  explicit Finder(const fs::path& folder) : folder_(folder), entries_(entries_of(folder)) {}

  FolderListing find() {
    for (const auto& file : entries_.companions) look_at_companion(file);
    for (const auto& file : entries_.tiffs) look_at_tiff(file);
    drop_members();
    for (const auto& file : entries_.folders) look_at_folder(file);
    if (listing_.films.empty()) {
      throw Problem("The folder " + folder_.string() +
                    " holds no film: no file in it ends in .tif, .tiff or .btf, and no folder in "
                    "it holds such files.");
    }
    std::stable_sort(listing_.films.begin(), listing_.films.end(),
                     [](const FoundFilm& left, const FoundFilm& right) {
                       return natural_less(left.name, right.name);
                     });
    merge_equal_names();
    mention_lone_sidecars();
    join_sheet(folder_, listing_);
    return std::move(listing_);
  }

 private:
  FoundFilm& add(const std::string& name, FilmKind kind, const fs::path& source) {
    FoundFilm film;
    film.name = as_utf8(name);
    film.kind = kind;
    film.source = source;
    film.sidecar = folder_ / (name + ".yaml");
    if (!is_utf8(name)) {
      film.problem =
          "The name of " + in_quotes(source.filename().string(), 200) + " is not UTF-8; rename it.";
    }
    listing_.films.push_back(film);
    return listing_.films.back();
  }

  void look_at_companion(const fs::path& file) {
    const std::string name = acquisition_name(file.filename().string());
    try {
      add_images(name, file, ome_of(file));
    } catch (const Problem& problem) {
      add(name, FilmKind::ome, file).problem = problem.what();
    }
  }

  void look_at_tiff(const fs::path& file) {
    if (members_.count(file) != 0) return;
    const std::string name = acquisition_name(file.filename().string());
    try {
      if (!fs::is_regular_file(file)) throw Problem(not_a_file(file));
      const auto description = first_description(file);
      if (!is_ome_xml(description)) {
        add(name, FilmKind::pages, file);
      } else {
        look_at_ome(name, file, description);
      }
    } catch (const Problem& problem) {
      add(name, FilmKind::pages, file).problem = problem.what();
    } catch (const fs::filesystem_error&) {
      add(name, FilmKind::pages, file).problem = not_a_file(file);
    }
  }

  static std::string not_a_file(const fs::path& file) {
    return "The file " + in_quotes(file.filename().string(), 200) +
           " cannot be opened: it is no file, or a link that leads nowhere.";
  }

  void look_at_ome(const std::string& name, const fs::path& file, const std::string& description) {
    std::optional<OmeMetadata> metadata;
    try {
      metadata = parse_ome(description, file.filename().string());
    } catch (const Problem& problem) {
      // The sidecar can still say what the damaged metadata would have said.
      listing_.messages.emplace_back(problem.what());
      add(name, FilmKind::pages, file);
      return;
    }
    if (metadata->series.empty()) {
      auto& film = add(name, FilmKind::ome, file);
      film.problem = "The file " + file.filename().string() + " leaves its metadata to " +
                     in_quotes(metadata->metadata_file, 200) +
                     ", which does not lie beside it; copy that file here too.";
    } else {
      add_images(name, file, *metadata);
    }
  }

  void add_images(const std::string& name, const fs::path& file, const OmeMetadata& metadata) {
    if (metadata.series.empty()) return;
    const OmeFiles files(metadata, file);
    for (const auto& member : files.all()) {
      if (member != file) members_.insert(member);
    }
    for (std::size_t i = 0; i < metadata.series.size(); ++i) {
      const std::string position = "position-" + std::to_string(i + 1);
      auto& film = add(i == 0 ? name : name + "/" + position, FilmKind::ome, file);
      film.image = static_cast<int>(i);
      film.sidecar = folder_ / (name + ".yaml");
      used_sidecars_.insert(film.sidecar);
      const auto own = folder_ / (name + "." + position + ".yaml");
      std::error_code ignored;
      if (fs::exists(own, ignored)) film.sidecar = own;
    }
  }

  /// Files of a set that came earlier in the order than the one with the metadata.
  void drop_members() {
    std::erase_if(listing_.films, [&](const FoundFilm& film) {
      return members_.count(film.source) != 0 && leaders_of_members(film);
    });
  }

  /// A file with metadata of its own for the same set stays out only if another file leads.
  bool leaders_of_members(const FoundFilm& film) const {
    return std::any_of(listing_.films.begin(), listing_.films.end(), [&](const FoundFilm& other) {
      return other.source != film.source && members_.count(other.source) == 0;
    });
  }

  bool leads_back(const fs::path& folder) const {
    std::error_code error;
    const auto inner = fs::canonical(folder, error);
    if (error) return true;
    const auto outer = fs::canonical(folder_, error);
    const auto [end, ignored] =
        std::mismatch(inner.begin(), inner.end(), outer.begin(), outer.end());
    return end == inner.end();
  }

  void look_at_folder(const fs::path& folder) {
    const std::string name = folder.filename().string();
    if (leads_back(folder)) {
      listing_.messages.push_back("The folder " + in_quotes(name, 200) +
                                  " is a link back to where it lies and was left out.");
      return;
    }
    try {
      const auto files = frame_files(folder);
      if (!files.empty()) add_folder(name, folder, files);
    } catch (const Problem& problem) {
      add(name, FilmKind::frames, folder).problem = problem.what();
    }
  }

  void add_folder(const std::string& name, const fs::path& folder,
                  const std::vector<fs::path>& files) {
    const auto description = first_description(files.front());
    if (is_ome_xml(description)) {
      const auto metadata = parse_ome(description, files.front().filename().string());
      const OmeFiles set(metadata, files.front());
      if (files.size() > 1 && set.all().size() >= files.size()) {
        add_images(name, files.front(), metadata);
        return;
      }
    }
    auto& film = add(name, FilmKind::frames, folder);
    if (has_several_pages(files.front())) {
      film.problem = "The folder " + in_quotes(name, 200) + " holds films of several pages (" +
                     in_quotes(files.front().filename().string(), 200) +
                     "); give that folder itself, or move the films beside the others.";
    }
  }

  /// One entry stays for a name that several films would have, so that no result overwrites
  /// another.
  void merge_equal_names() {
    auto& films = listing_.films;
    for (std::size_t i = 1; i < films.size();) {
      auto& first = films[i - 1];
      if (films[i].name != first.name) {
        ++i;
        continue;
      }
      first.problem = "Both " + in_quotes(first.source.filename().string(), 200) + " and " +
                      in_quotes(films[i].source.filename().string(), 200) +
                      " would be the acquisition " + in_quotes(first.name, 200) + "; rename one.";
      films.erase(films.begin() + static_cast<std::ptrdiff_t>(i));
    }
  }

  void mention_lone_sidecars() {
    for (const auto& film : listing_.films) used_sidecars_.insert(film.sidecar);
    for (const auto& sidecar : entries_.sidecars) {
      if (used_sidecars_.count(sidecar) != 0) continue;
      listing_.messages.push_back(
          "The file " + in_quotes(sidecar.filename().string(), 200) +
          " belongs to no film of the folder; a sidecar has the film's name and ends in .yaml.");
    }
  }

  fs::path folder_;
  Entries entries_;
  FolderListing listing_;
  std::set<fs::path> members_;  ///< files of sets that other files lead
  std::set<fs::path> used_sidecars_;
};

}  // namespace

FolderListing list_films(const fs::path& folder) {
  return Finder(folder).find();
}

}  // namespace wavefount
