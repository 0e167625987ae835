#include "plane_table.h"

#include <algorithm>
#include <array>
#include <map>

#include "ome_files.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

std::size_t plane_index(const PlaneTable& table, int frame, int channel, int z) {
  return (static_cast<std::size_t>(frame) * static_cast<std::size_t>(table.channels) +
          static_cast<std::size_t>(channel)) *
             static_cast<std::size_t>(table.z_planes) +
         static_cast<std::size_t>(z);
}

/// Counts planes through the dimensions in their order.
class Odometer {
 public:
  Odometer(const std::string& letters, int channels, int z_planes, int frames) : letters_(letters) {
    size_['C'] = channels;
    size_['Z'] = z_planes;
    size_['T'] = frames;
  }

  /// Frame, channel and z of the plane `step` places after the given one.
  std::array<int, 3> place(long long step, int frame = 0, int channel = 0, int z = 0) const {
    std::map<char, int> place = {{'C', channel}, {'Z', z}, {'T', frame}};
    long long start = 0, stride = 1;
    for (const char letter : letters_) {
      start += place.at(letter) * stride;
      stride *= size_.at(letter);
    }
    long long rest = start + step;
    for (const char letter : letters_) {
      place[letter] = static_cast<int>(rest % size_.at(letter));
      rest /= size_.at(letter);
    }
    return {place['T'], place['C'], place['Z']};
  }

 private:
  std::string letters_;
  std::map<char, int> size_;
};

void note_broken(PlaneTable& table, const std::filesystem::path& file, const TiffIndex& index) {
  if (index.broken.empty()) return;
  table.notes.push_back("Of " + file.filename().string() + " only the first " +
                        std::to_string(index.pages.size()) + " pages were used, since " +
                        index.broken + ".");
  table.cut = true;
}

/// All pages of the files in a row; smaller copies of pages left out.
std::vector<Plane> pages_in_a_row(PlaneTable& table) {
  std::vector<Plane> row;
  std::size_t copies = 0;
  for (std::size_t i = 0; i < table.files.size(); ++i) {
    const auto index = index_tiff(table.files[i]);
    if (i == 0) table.description = index.description;
    if (table.files.size() > 1 && index.pages.size() > 1) {
      throw Problem("The file " + table.files[i].filename().string() + " has " +
                    std::to_string(index.pages.size()) +
                    " pages, but a folder of frames holds one page a file; move films of several "
                    "pages out of it.");
    }
    note_broken(table, table.files[i], index);
    for (std::size_t page = 0; page < index.pages.size(); ++page) {
      if (index.pages[page].reduced && page > 0) {
        ++copies;
      } else {
        row.push_back({static_cast<int>(i), static_cast<int>(page) + 1, index.pages[page]});
      }
    }
  }
  if (copies > 0) {
    table.notes.push_back("Left out " + std::to_string(copies) +
                          " pages that are smaller copies of others.");
  }
  return row;
}

int frames_in(PlaneTable& table, std::size_t pages, const PlaneOrder& order) {
  const auto planes =
      static_cast<std::size_t>(order.channels) * static_cast<std::size_t>(order.z_planes);
  const std::size_t left_over = pages % planes;
  const bool time_slowest = order.letters.back() == 'T';
  if (planes > 1 && !time_slowest && (left_over != 0 || table.cut)) {
    throw Problem("The film " + table.files.front().filename().string() + " has " +
                  std::to_string(pages) + " whole pages, which do not make whole frames of " +
                  std::to_string(planes) + " planes in the order " + order.letters +
                  "; correct channels, z_planes or order in the sidecar, or copy the film again.");
  }
  if (left_over != 0) {
    table.notes.push_back("The last " + std::to_string(left_over) +
                          " pages were left out, since they make no whole frame of " +
                          std::to_string(planes) + " planes.");
    table.cut = true;
  }
  return static_cast<int>(pages / planes);
}

/// Pages of an OME set's files, indexed when first asked for.
class SetPages {
 public:
  explicit SetPages(PlaneTable& table) : table_(table) {}

  int file_number(const std::filesystem::path& file) {
    const auto [entry, added] = numbers_.try_emplace(file, static_cast<int>(indexes_.size()));
    if (!added) return entry->second;
    table_.files.push_back(file);
    indexes_.emplace_back();
    std::error_code ignored;
    if (!std::filesystem::exists(file, ignored)) return entry->second;
    indexes_.back() = index_tiff(file);
    note_broken(table_, file, indexes_.back());
    return entry->second;
  }
  const TiffIndex& index(int number) const { return indexes_[static_cast<std::size_t>(number)]; }

  Plane plane(int file, int page) const {
    const auto& pages = index(file).pages;
    if (page < static_cast<int>(pages.size())) {
      return {file, page + 1, pages[static_cast<std::size_t>(page)]};
    }
    Plane nowhere;
    const auto name = table_.files[static_cast<std::size_t>(file)].filename().string();
    nowhere.page.problem =
        pages.empty() ? "is missing, since the file " + name + " of the set is not in the folder"
                      : "is missing from the end of the file " + name;
    return nowhere;
  }

 private:
  PlaneTable& table_;
  std::map<std::filesystem::path, int> numbers_;
  std::vector<TiffIndex> indexes_;
};

/// Pages that the images before this one take in a file whose OME-XML says no more.
int pages_before(const OmeMetadata& metadata, int image) {
  int pages = 0;
  for (int i = 0; i < image; ++i) {
    const auto& series = metadata.series[static_cast<std::size_t>(i)];
    pages += series.frames * series.channels * series.z_planes;
  }
  return pages;
}

void place_block(PlaneTable& table, SetPages& pages, const OmeSeries& series, const OmeBlock& block,
                 const std::filesystem::path& file) {
  if (file.empty() || block.first_t >= series.frames || block.first_c >= series.channels ||
      block.first_z >= series.z_planes) {
    return;
  }
  const int number = pages.file_number(file);
  const Odometer odometer(series.order, series.channels, series.z_planes, series.frames);
  const int all = series.frames * series.channels * series.z_planes;
  const int rest = static_cast<int>(pages.index(number).pages.size()) - block.directory;
  const int count = std::min(block.planes > 0 ? block.planes : std::max(rest, 0), all);
  for (int i = 0; i < count; ++i) {
    const auto [frame, channel, z] = odometer.place(i, block.first_t, block.first_c, block.first_z);
    table.at(frame, channel, z) = pages.plane(number, block.directory + i);
  }
}

std::string complaint_about(const Plane& plane, const TiffPage& usual) {
  if (!plane.page.problem.empty()) return plane.page.problem;
  if (plane.page.width != usual.width || plane.page.height != usual.height) {
    return "is " + std::to_string(plane.page.width) + " × " + std::to_string(plane.page.height) +
           " pixels, not " + std::to_string(usual.width) + " × " + std::to_string(usual.height);
  }
  if (plane.page.bits != usual.bits || plane.page.kind != usual.kind) {
    return "has another type of pixels than the first";
  }
  return {};
}

struct BadFrame {
  int frame = 0;
  bool other_size = false;
  std::string sentence;  ///< without full stop
};

std::string place_text(const PlaneTable& table, const Plane& plane, int frame) {
  std::string text = "Frame " + std::to_string(frame);
  if (plane.file >= 0) {
    text += " (page " + std::to_string(plane.number) + " of " +
            table.files[static_cast<std::size_t>(plane.file)].filename().string() + ")";
  }
  return text;
}

std::vector<BadFrame> bad_frames(const PlaneTable& table, const TiffPage& usual) {
  std::vector<BadFrame> bad;
  for (int frame = 0; frame < table.frames; ++frame) {
    for (int plane = 0; plane < table.channels * table.z_planes; ++plane) {
      const auto& candidate = table.at(frame, plane / table.z_planes, plane % table.z_planes);
      const auto complaint = complaint_about(candidate, usual);
      if (complaint.empty()) continue;
      bad.push_back({frame, candidate.page.problem.empty(),
                     place_text(table, candidate, frame) + " " + complaint});
      break;
    }
  }
  return bad;
}

/// The first of the bad frames after which no frame is whole; its index in `bad`.
std::size_t start_of_tail(const std::vector<BadFrame>& bad, int frames) {
  std::size_t start = bad.size();
  int frame = frames;
  while (start > 0 && bad[start - 1].frame == frame - 1) {
    --start;
    --frame;
  }
  return start;
}

void cut_tail(PlaneTable& table, const BadFrame& first) {
  table.notes.push_back(first.sentence + "; the film was used up to the frame before.");
  table.frames = first.frame;
  table.planes.resize(plane_index(table, first.frame, 0, 0));
  table.cut = true;
}

}  // namespace

const Plane& PlaneTable::at(int frame, int channel, int z) const {
  return planes[plane_index(*this, frame, channel, z)];
}

Plane& PlaneTable::at(int frame, int channel, int z) {
  return planes[plane_index(*this, frame, channel, z)];
}

PlaneTable planes_in_order(const std::vector<std::filesystem::path>& files,
                           const PlaneOrder& order) {
  PlaneTable table;
  table.files = files;
  table.channels = order.channels;
  table.z_planes = order.z_planes;
  auto row = pages_in_a_row(table);
  table.frames = frames_in(table, row.size(), order);
  table.planes.resize(plane_index(table, table.frames, 0, 0));
  if (table.frames == 0) {
    throw Problem("The film " + files.front().filename().string() + " has fewer pages than one " +
                  "frame has planes; correct channels or z_planes in the sidecar.");
  }
  const Odometer odometer(order.letters, order.channels, order.z_planes, table.frames);
  for (std::size_t i = 0; i < table.planes.size(); ++i) {
    const auto [frame, channel, z] = odometer.place(static_cast<long long>(i));
    table.at(frame, channel, z) = std::move(row[i]);
  }
  return table;
}

PlaneTable planes_of_series(const OmeMetadata& metadata, int image,
                            const std::filesystem::path& own) {
  const auto& series = metadata.series.at(static_cast<std::size_t>(image));
  PlaneTable table;
  table.frames = series.frames;
  table.channels = series.channels;
  table.z_planes = series.z_planes;
  Plane nowhere;
  nowhere.page.problem = "is in no file that the OME-XML names";
  table.planes.assign(plane_index(table, table.frames, 0, 0), nowhere);
  const OmeFiles files(metadata, own);
  SetPages pages(table);
  for (const auto& block : series.blocks) {
    place_block(table, pages, series, block, files.file_of(block));
  }
  if (series.blocks.empty()) {
    OmeBlock whole;
    whole.directory = pages_before(metadata, image);
    whole.planes = static_cast<int>(table.planes.size());
    place_block(table, pages, series, whole, own);
  }
  return table;
}

void keep_whole_frames(PlaneTable& table) {
  const auto whole = std::find_if(table.planes.begin(), table.planes.end(),
                                  [](const Plane& plane) { return plane.page.problem.empty(); });
  if (whole == table.planes.end()) {
    throw Problem(place_text(table, table.planes.front(), 0) + " " +
                  table.planes.front().page.problem + ", and no frame is whole.");
  }
  auto bad = bad_frames(table, whole->page);
  const std::size_t tail = start_of_tail(bad, table.frames);
  const int half = table.frames / 2;
  for (std::size_t i = 0; i < bad.size(); ++i) {
    if (bad[i].other_size && (i < tail || bad[i].frame < half)) {
      throw Problem(bad[i].sentence + "; export the film again with frames of one kind.");
    }
  }
  if (tail < bad.size()) cut_tail(table, bad[tail]);
  if (table.frames == 0) throw Problem(bad.front().sentence + ", and no frame is whole.");
  for (std::size_t i = 0; i < tail; ++i) {
    table.unusable.push_back(bad[i].frame);
    table.notes.push_back(bad[i].sentence + "; the frame was left out.");
  }
}

}  // namespace wavefount
