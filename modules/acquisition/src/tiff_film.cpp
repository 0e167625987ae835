#include "tiff_film.h"

#include "plane_decoder.h"
#include "wavefount/core/problem.h"

namespace wavefount {
namespace {

/// Holds one file open at a time, so that a folder of many frames needs no many handles.
class TiffReader : public FrameReader {
 public:
  explicit TiffReader(std::shared_ptr<const PlaneTable> table) : table_(std::move(table)) {}

  ImagePointer read(int frame, int channel, int z) override {
    if (frame < 0 || frame >= table_->frames || channel < 0 || channel >= table_->channels ||
        z < 0 || z >= table_->z_planes) {
      throw Problem("Frame " + std::to_string(frame) + ", channel " + std::to_string(channel + 1) +
                    ", plane " + std::to_string(z + 1) + " lies outside the film.");
    }
    const auto& plane = table_->at(frame, channel, z);
    try {
      if (plane.file < 0) throw Problem("It " + plane.page.problem + ".");
      return decoder(table_->files[static_cast<std::size_t>(plane.file)]).read(plane.page);
    } catch (const Problem& problem) {
      throw Problem("Frame " + std::to_string(frame) + " cannot be read. " + problem.what());
    }
  }

 private:
  PlaneDecoder& decoder(const std::filesystem::path& file) {
    if (!decoder_ || decoder_->file() != file) {
      decoder_.reset();
      decoder_ = std::make_unique<PlaneDecoder>(file);
    }
    return *decoder_;
  }

  std::shared_ptr<const PlaneTable> table_;
  std::unique_ptr<PlaneDecoder> decoder_;
};

bool frame_decodes(const PlaneTable& table, TiffReader& reader, int frame) {
  try {
    for (int channel = 0; channel < table.channels; ++channel) {
      for (int z = 0; z < table.z_planes; ++z) reader.read(frame, channel, z);
    }
  } catch (const Problem&) {
    return false;
  }
  return true;
}

}  // namespace

TiffFilm::TiffFilm(FilmDescription description, PlaneTable table)
    : description_(std::move(description)),
      table_(std::make_shared<const PlaneTable>(std::move(table))) {}

std::unique_ptr<FrameReader> TiffFilm::reader() const {
  return std::make_unique<TiffReader>(table_);
}

void drop_broken_end(PlaneTable& table) {
  const auto shared = std::make_shared<const PlaneTable>(table);
  TiffReader reader(shared);
  int frames = table.frames;
  while (frames > 0 && !frame_decodes(*shared, reader, frames - 1)) --frames;
  if (frames == table.frames) return;
  const std::string file = table.files.front().filename().string();
  if (frames == 0) {
    throw Problem(
        "The film " + file +
        " has no frame whose pixels are whole; copy it again from where it was recorded.");
  }
  table.notes.push_back("The pixels of the last " + std::to_string(table.frames - frames) +
                        " frames of " + file + " are damaged; the film was used up to frame " +
                        std::to_string(frames - 1) + ".");
  table.frames = frames;
  table.planes.resize(static_cast<std::size_t>(frames) * static_cast<std::size_t>(table.channels) *
                      static_cast<std::size_t>(table.z_planes));
  table.cut = true;
}

}  // namespace wavefount
