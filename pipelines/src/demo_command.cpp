#include "demo_command.h"

#include <CLI/CLI.hpp>
#include <cstdio>
#include <memory>
#include <string>
#include <thread>

#include "wavefount/synthetic/demo.h"

namespace wavefount {
namespace {

struct DemoWords {
  std::string folder;
  DemoOptions options;
};

void add_scene_options(CLI::App& command, DemoOptions& options) {
  command.add_option("--count", options.count, "acquisitions (default: each scenario once)");
  command.add_option("--seed", options.seed, "other nuclei, jitter and noise");
  command.add_option("--width-um", options.tube_width_um, "tube width, um");
  command.add_option("--frames", options.frames, "frames a film");
  command.add_option("--interval-min", options.interval_min, "minutes between frames");
  command.add_option("--pixel-um", options.pixel_um, "um a pixel");
  command.add_option("--view-um", options.view_um, "length of the image, um");
  command.add_option("--noise", options.noise, "factor on the relative noise of the light");
  command.add_option("--scenario", options.only, "only these scenarios");
}

void add_file_options(CLI::App& command, DemoOptions& options) {
  const std::map<std::string, FilmFormat> formats = {{"ome-tiff", FilmFormat::ome_tiff},
                                                     {"tiff", FilmFormat::tiff_with_sidecar},
                                                     {"frames", FilmFormat::frame_folder}};
  const std::map<std::string, TiffCompression> compressions = {
      {"none", TiffCompression::none},
      {"lzw", TiffCompression::lzw},
      {"deflate", TiffCompression::deflate},
      {"zstd", TiffCompression::zstd}};
  command
      .add_option_function<std::string>(
          "--format", [&options, formats](const auto& word) { options.format = formats.at(word); },
          "ome-tiff, tiff (with sidecar) or frames (a folder); default: by scenario")
      ->check(CLI::IsMember(formats));
  command
      .add_option_function<std::string>(
          "--compression",
          [&options, compressions](const auto& word) {
            options.compression = compressions.at(word);
          },
          "none, lzw, deflate or zstd")
      ->check(CLI::IsMember(compressions));
  command.add_flag("--labels", options.labels, "write the true outlines as label images too");
}

}  // namespace

void add_demo_command(CLI::App& app, int& status) {
  auto* command = app.add_subcommand("demo", "make invented films with known truth");
  auto words = std::make_shared<DemoWords>();
  words->options.threads = static_cast<int>(std::max(1U, std::thread::hardware_concurrency()));
  command->add_option("folder", words->folder, "where to put films/ and truth/")->required();
  add_scene_options(*command, words->options);
  add_file_options(*command, words->options);
  command->callback([words, &status] {
    words->options.say = [](const std::string& line) {
      std::printf("%s\n", line.c_str());
      std::fflush(stdout);
    };
    write_demo(words->folder, words->options);
    std::printf("Films are in %s/films, their truth in %s/truth. All of it is invented.\n",
                words->folder.c_str(), words->folder.c_str());
    status = 0;
  });
}

}  // namespace wavefount
